export interface ServerEvent {
  id?: string;
  data: string;
}

/**
 * Parser of a server-sent event stream (WHATWG HTML, "Server-sent events"): text in, in any pieces; whole events out.
 * Comments and unknown fields are skipped, an event without data is none.
 */
export function createEventParser(onEvent: (event: ServerEvent) => void): (text: string) => void {
  let rest = '';
  let id: string | undefined;
  let data: string[] = [];
  const takeLine = (line: string): void => {
    if (line === '') {
      if (data.length > 0) onEvent({ id, data: data.join('\n') });
      data = [];
      return;
    }
    const [, field, value] = /^([^:]*):? ?(.*)$/s.exec(line) ?? [];
    if (field === 'data') data.push(value);
    else if (field === 'id') id = value;
  };
  return (text) => {
    // A CR at the very end may be half of CR LF: kept for the next piece.
    const lines = (rest + text).split(/\r\n|\n|\r(?!$)/);
    rest = lines.pop() ?? '';
    for (const line of lines) takeLine(line);
  };
}

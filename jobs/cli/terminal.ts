/** Where a verb writes. Results go to standard output; everything about the work itself to standard error. */
export interface Terminal {
  out(text: string): void;
  /** A line about progress or circumstances; silent with --quiet. */
  note(text: string): void;
  /** A line that is worth reading even with --quiet. */
  warn(text: string): void;
  /** One line that is overwritten in place; shown on a terminal only. Without text: wiped. */
  progress(text?: string): void;
  /** Aborted by the first Ctrl+C. */
  readonly interrupt: AbortSignal;
}

const BAR_CELLS = 24;

export function createTerminal(interrupt: AbortSignal, quiet = false): Terminal {
  const live = !quiet && process.stderr.isTTY === true;
  let shown = false;
  const wipe = (): void => {
    if (shown) process.stderr.write('\r\u001b[2K');
    shown = false;
  };
  return {
    interrupt,
    out: (text) => {
      wipe();
      process.stdout.write(text);
    },
    note: (text) => {
      wipe();
      if (!quiet) process.stderr.write(`${text}\n`);
    },
    warn: (text) => {
      wipe();
      process.stderr.write(`${text}\n`);
    },
    progress: (text) => {
      wipe();
      if (!live || text === undefined) return;
      process.stderr.write(text.slice(0, (process.stderr.columns ?? 80) - 1));
      shown = true;
    },
  };
}

/** `[######..................] 12/48 what, 40 s left`; without `leftS` nobody knows yet how long. */
export function progressBar(done: number, total: number, what: string, leftS?: number | null): string {
  const cells = total > 0 ? Math.round((BAR_CELLS * done) / total) : 0;
  return `[${'#'.repeat(cells)}${'.'.repeat(BAR_CELLS - cells)}] ${done}/${total} ${what}${leftText(leftS)}`;
}

function leftText(leftS?: number | null): string {
  if (leftS === undefined || leftS === null || !(leftS > 0)) return '';
  return leftS < 100 ? `, ${Math.ceil(leftS)} s left` : `, ${Math.ceil(leftS / 60)} min left`;
}

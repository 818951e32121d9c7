/** Text of a CSV file (RFC 4180) with its cells parted by tabs; a tab or line break within a cell becomes a space. */
export function tabsFromCsv(csv: string): string {
  let out = '';
  let isQuoted = false;
  for (let i = 0; i < csv.length; i++) {
    const c = csv[i];
    if (isQuoted && c === '"' && csv[i + 1] === '"') {
      out += '"';
      i++;
    } else if (c === '"') isQuoted = !isQuoted;
    else if (c === ',' && !isQuoted) out += '\t';
    else if (isQuoted && (c === '\t' || c === '\n' || c === '\r')) out += ' ';
    else out += c;
  }
  return out;
}

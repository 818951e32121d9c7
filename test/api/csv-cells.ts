/** Records of a CSV text by RFC 4180, section 2: cells parted by commas, quoted ones may hold commas, line breaks and doubled quotes. */
export function csvRecords(text: string): string[][] {
  const records: string[][] = [[]];
  const cell = /("((?:[^"]|"")*)"|([^",\r\n]*))(,|\r?\n|$)/gy;
  while (cell.lastIndex < text.length) {
    const found = cell.exec(text);
    if (!found) throw new RangeError(`no cell at character ${cell.lastIndex} of ${JSON.stringify(text.slice(0, 200))}`);
    const [, , quoted, plain, end] = found;
    records.at(-1)?.push(quoted === undefined ? plain : quoted.replaceAll('""', '"'));
    if (end.endsWith('\n')) records.push([]);
  }
  if (records.at(-1)?.length === 0) records.pop();
  return records;
}

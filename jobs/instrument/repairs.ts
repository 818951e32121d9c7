/** From raw rows to a scan in SI: bad rows dropped within limits, repeated times averaged, a clipped signal told. */
import { type Flag, flag, quote } from '../../schema/wire/flags.ts';
import type { ReadOutcome, ReadRefusal, ReadScan } from '../../schema/wire/scan.ts';
import { clippedRuns } from './clipping.ts';
import type { ColumnsBuffer } from './columns-buffer.ts';
import type { ScanHeader } from './header.ts';
import { addToTally, type BadLine, createTally, type LineTally, type OddRows } from './odd-rows.ts';
import type { Unit } from './units.ts';

/** Share of bad rows that may be dropped. */
const BAD_ROW_SHARE = 0.001;
/** Fewest rows of a scan. */
const FEWEST_ROWS = 20;
/** How many line numbers a sentence lists. */
const LISTED_LINES = 8;

export interface RawRows {
  file: string;
  header: ScanHeader;
  columns: ColumnsBuffer;
  odd: OddRows;
  /** Last line, when the file ends without a line end */
  openLine?: number;
  /** Encoding in words, e.g. `UTF-8` */
  encoding: string;
}

export function finishScan(raw: RawRows): ReadOutcome {
  const { header, columns, odd, file } = raw;
  odd.finish();
  const total = columns.rows + odd.bad.count;
  if (columns.rows === 0) return refuse(nothingUnderHeader(raw));
  header.columns.forEach((column, i) => {
    columnToSi([columns.time, columns.temperature, columns.heatFlow][i], columns.rows, column.unit);
  });
  const clipped = clippedRuns(columns.heatFlow.subarray(0, columns.rows));
  const clippedLines = clipped.map((run) => ({
    ...run,
    from: columns.lineOf(run.from),
    to: columns.lineOf(run.to - 1),
  }));

  const bad = odd.bad;
  const sound = isSound(columns);
  const repeats = sound ? createTally() : dropImpossibleRows(columns, bad);
  const allowed = Math.floor(total * BAD_ROW_SHARE);
  const cutLine = raw.openLine !== undefined && raw.openLine === odd.lastBadLine ? raw.openLine : undefined;
  if (bad.count > allowed) return refuse(tooManyBadRows(bad, total, allowed, cutLine));
  const rowsBefore = columns.rows;
  if (!sound) averageRepeats(columns);
  const rows = columns.rows;
  if (rows < FEWEST_ROWS) return refuse(tooFewRows(rows, rowsBefore, raw));

  const flags: Flag[] = [];
  const where = { file };
  if (bad.count > 0)
    flags.push(
      flag(
        'rows-repaired',
        `${bad.count} of ${total} rows dropped: ${badLinesText(bad)}${cutLine === undefined ? '' : '; the last line is cut short, the copy may be incomplete'}`,
        'Look at these lines in the original; export or copy the file again if they matter.',
        where,
      ),
    );
  if (repeats.count > 0)
    flags.push(
      flag(
        'rows-repaired',
        `${repeats.count} of ${total} rows repeat the time before them and were averaged with it: ${linesText(repeats)}`,
        'Export the time with more digits if the instrument keeps them.',
        where,
      ),
    );
  if (odd.footer.count > 0)
    flags.push(
      flag(
        'rows-repaired',
        `${odd.footer.count} ${odd.footer.count === 1 ? 'line' : 'lines'} of text after the last row of numbers left out, from line ${odd.footer.first[0].line}: ${quote(odd.footer.first[0].text ?? '')}`,
        'Nothing to do if this is a footer.',
        where,
      ),
    );
  for (const run of clippedLines)
    flags.push(
      flag(
        'signal-clipped',
        `the signal sits at its ${run.at} ${run.value} ${header.columns[2].unit.si} for ${run.length} rows (lines ${run.from} to ${run.to})`,
        'Measure again with a wider range or a smaller sample; heights and areas from this scan are too small.',
        where,
      ),
    );
  const scan: ReadScan = {
    timeS: columns.time.slice(0, rows),
    temperatureK: columns.temperature.slice(0, rows),
    heatFlow: columns.heatFlow.slice(0, rows),
    heatFlowUnit: header.columns[2].unit.si as ReadScan['heatFlowUnit'],
    columns: header.columns.map((c) => ({ quantity: c.quantity, header: c.header, unit: c.unit.symbol })),
    dialect: dialectText(raw),
    flags,
  };
  if (header.exotherm !== undefined) scan.exotherm = header.exotherm;
  return { ok: true, scan };
}

function columnToSi(column: Float64Array, rows: number, { offset, scale, per }: Unit): void {
  if (offset !== 0) for (let i = 0; i < rows; i++) column[i] += offset;
  if (scale !== 1) for (let i = 0; i < rows; i++) column[i] *= scale;
  if (per !== 1) for (let i = 0; i < rows; i++) column[i] /= per;
}

/** Nothing to repair: time strictly increasing, temperature above 0 K. */
function isSound({ time, temperature, rows }: ColumnsBuffer): boolean {
  let before = Number.NEGATIVE_INFINITY;
  for (let i = 0; i < rows; i++) {
    const t = time[i];
    if (!(t > before && temperature[i] > 0)) return false;
    before = t;
  }
  return true;
}

/**
 * Drops rows whose time runs backwards or whose temperature is not above 0 K, in place, and counts them as bad.
 * Of two neighbours in the wrong order the one that does not fit the row after goes. Returns the rows that repeat a time.
 */
function dropImpossibleRows(columns: ColumnsBuffer, bad: LineTally): LineTally {
  const { time, temperature, heatFlow } = columns;
  const rows = columns.rows;
  const repeats = createTally();
  let kept = 0;
  for (let i = 0; i < rows; i++) {
    const t = time[i];
    if (!(temperature[i] > 0)) {
      addToTally(bad, columns.lineOf(i), `has ${temperature[i]} K: a temperature must be above 0 K`);
      continue;
    }
    if (kept > 0 && t < time[kept - 1]) {
      const previous = time[kept - 1];
      const leap = kept > 1 && t >= time[kept - 2] && !(i + 1 < rows && time[i + 1] >= previous);
      addToTally(
        bad,
        columns.lineOf(leap ? i - 1 : i),
        leap ? `leaps ahead to ${previous} s, the next row has ${t} s` : `runs backwards to ${t} s after ${previous} s`,
      );
      if (!leap) continue;
      kept--;
    } else if (kept > 0 && t === time[kept - 1]) addToTally(repeats, columns.lineOf(i), '');
    time[kept] = t;
    temperature[kept] = temperature[i];
    heatFlow[kept] = heatFlow[i];
    kept++;
  }
  columns.rows = kept;
  return repeats;
}

/** Rows of one time become their mean, in place. */
function averageRepeats(columns: ColumnsBuffer): void {
  const { time, temperature, heatFlow } = columns;
  let kept = 0;
  for (let i = 0; i < columns.rows; ) {
    let j = i + 1;
    let temperatureSum = temperature[i];
    let heatFlowSum = heatFlow[i];
    for (; j < columns.rows && time[j] === time[i]; j++) {
      temperatureSum += temperature[j];
      heatFlowSum += heatFlow[j];
    }
    time[kept] = time[i];
    temperature[kept] = j - i === 1 ? temperature[i] : temperatureSum / (j - i);
    heatFlow[kept] = j - i === 1 ? heatFlow[i] : heatFlowSum / (j - i);
    kept++;
    i = j;
  }
  columns.rows = kept;
}

function refuse(refusal: ReadRefusal): ReadOutcome {
  return { ok: false, refusal };
}

function nothingUnderHeader({ header, odd }: RawRows): ReadRefusal {
  const found =
    odd.bad.count === 0
      ? 'nothing follows it'
      : `of the ${odd.bad.count} lines under it none is a row of numbers: ${badLinesText(odd.bad)}`;
  return {
    code: 'file-damaged',
    reason: `the header (line ${header.line}) is there, but ${found}`,
    action: 'Export the scan again with its rows of numbers, one delimiter and one decimal mark throughout.',
    line: odd.bad.first[0]?.line ?? header.line,
  };
}

function tooManyBadRows(bad: LineTally, total: number, allowed: number, cutLine: number | undefined): ReadRefusal {
  if (cutLine !== undefined && bad.count - 1 <= allowed) {
    const cut = bad.first.find((b) => b.line === cutLine);
    return {
      code: 'file-damaged',
      reason: `the file ends in the middle of line ${cutLine}${cut === undefined ? '' : `: ${quote(cut.text ?? '')} ${cut.problem}`}`,
      action: 'The copy is incomplete: copy or export the file again.',
      line: cutLine,
    };
  }
  return {
    code: 'file-damaged',
    reason: `${bad.count} of ${total} rows are bad, ${allowed} may be (0.1 %): ${badLinesText(bad)}`,
    action: 'Mend these lines or export the scan again.',
    line: bad.first[0]?.line,
  };
}

function tooFewRows(rows: number, before: number, { header, openLine }: RawRows): ReadRefusal {
  const merged = before > rows ? ` (${before} before repeated times were averaged)` : '';
  return {
    code: 'file-damaged',
    reason: `only ${rows} rows of numbers${merged} under the header on line ${header.line}; a scan needs ${FEWEST_ROWS}${openLine === undefined ? '' : `; line ${openLine} ends without a line end, the copy may be incomplete`}`,
    action: 'Export the whole scan with every sampled point, and the time with enough digits to tell rows apart.',
    line: header.line,
  };
}

function badLinesText(tally: LineTally): string {
  const more = tally.count > tally.first.length ? ` and ${tally.count - tally.first.length} more` : '';
  return tally.first.map(badLineText).join('; ') + more;
}

function badLineText({ line, text, problem }: BadLine): string {
  return `line ${line} ${text === undefined ? '' : `${quote(text)} `}${problem}`;
}

function linesText(tally: LineTally): string {
  const shown = tally.first.slice(0, LISTED_LINES).map((l) => l.line);
  const more = tally.count > shown.length ? ` and ${tally.count - shown.length} more` : '';
  return `${shown.length === 1 ? 'line' : 'lines'} ${shown.join(', ')}${more}`;
}

function dialectText({ header, encoding, odd }: RawRows): string {
  const mark = odd.decimalMark();
  const parts = [
    encoding,
    header.delimiter,
    mark === undefined ? 'whole numbers' : mark === ',' ? 'decimal comma' : 'decimal point',
    `header line ${header.line}`,
  ];
  if (header.unused.length > 0) parts.push(`columns not used: ${header.unused.map(quote).join(' ')}`);
  if (header.directionConflict !== undefined)
    parts.push(`directions of the exotherm contradict each other: ${header.directionConflict}`);
  return parts.join(', ');
}

/** Cuts a stream of text bytes into whole lines for the row parser; holds at most one unfinished line. */
import type { ReadRefusal } from '../../schema/wire/scan.ts';
import { ROW_LIMIT } from './columns-buffer.ts';
import { LINE_LIMIT, type RowParser } from './row-parser.ts';

const LF = 10;
const CR = 13;
/** Bytes transcoded at a time, so that UTF-16 is never held twice. */
const SLICE_BYTES = 65_536;

export type Transcoder = (chunk: Uint8Array, last: boolean) => Uint8Array;

export class RowFeed {
  refusal: ReadRefusal | undefined;
  /** The last line, when the file ended without a line end */
  openLine: number | undefined;
  /** Made when a chunk first ends inside a line: small files never need it. */
  private carried: Uint8Array | undefined;
  private carriedLength = 0;
  /** The line before ended in CR: a LF that comes first now belongs to it. */
  private afterReturn = false;

  constructor(
    readonly parser: RowParser,
    private readonly transcode: Transcoder | undefined,
  ) {}

  /** Bytes as they stand in the file, behind those of the head. */
  push(raw: Uint8Array): void {
    if (this.transcode === undefined) {
      this.pushText(raw);
      return;
    }
    for (let at = 0; at < raw.length; at += SLICE_BYTES)
      this.pushText(this.transcode(raw.subarray(at, at + SLICE_BYTES), false));
  }

  /** Bytes already transcoded. */
  pushText(b: Uint8Array): void {
    if (b.length === 0 || this.refusal !== undefined) return;
    let from = this.afterReturn && b[0] === LF ? 1 : 0;
    this.afterReturn = false;
    let to = b.length;
    while (to > from && b[to - 1] !== LF && b[to - 1] !== CR) to--;
    if (to === from) {
      this.carry(b.subarray(from));
      return;
    }
    this.afterReturn = b[to - 1] === CR;
    if (this.carriedLength > 0) {
      let end = from;
      while (b[end] !== LF && b[end] !== CR) end++;
      this.carry(b.subarray(from, end));
      this.parseCarried();
      from = b[end] === CR && end + 1 < to && b[end + 1] === LF ? end + 2 : end + 1;
    }
    this.parse(b, from, to);
    this.carry(b.subarray(to));
  }

  /** Call once, after the last push. `flush` is false when the head was the whole file. */
  end(flush: boolean): void {
    if (flush && this.transcode !== undefined) this.pushText(this.transcode(new Uint8Array(0), true));
    if (this.carriedLength === 0) return;
    this.openLine = this.parser.line;
    this.parseCarried();
  }

  private carry(part: Uint8Array): void {
    if (this.carriedLength + part.length > LINE_LIMIT) this.refusal ??= lineTooLong(this.parser.line);
    if (this.refusal !== undefined) return;
    if (part.length === 0) return;
    this.carried ??= new Uint8Array(LINE_LIMIT + 2);
    this.carried.set(part, this.carriedLength);
    this.carriedLength += part.length;
  }

  private parseCarried(): void {
    if (this.carried === undefined) return;
    this.carried[this.carriedLength] = LF;
    this.parse(this.carried, 0, this.carriedLength + 1);
    this.carriedLength = 0;
  }

  private parse(b: Uint8Array, from: number, to: number): void {
    if (this.refusal !== undefined || from >= to) return;
    this.parser.parse(b, from, to);
    if (this.parser.stop === 'line') this.refusal = lineTooLong(this.parser.line);
    if (this.parser.stop === 'rows')
      this.refusal = {
        code: 'file-damaged',
        reason: `more than ${ROW_LIMIT} rows (line ${this.parser.line})`,
        action: `Export the scan with at most ${ROW_LIMIT} rows, or in parts.`,
        line: this.parser.line,
      };
  }
}

export function lineTooLong(line: number): ReadRefusal {
  return {
    code: 'file-damaged',
    reason: `line ${line} is longer than ${LINE_LIMIT} bytes`,
    action: 'Export the scan as delimited text with one row a line.',
    line,
  };
}

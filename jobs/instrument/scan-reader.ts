/** Bytes of an instrument file, in chunks of any size, to a scan. Holds the head of the file until its header is found, then columns only. */
import { quote } from '../../schema/wire/flags.ts';
import type { ReadOutcome, ReadRefusal } from '../../schema/wire/scan.ts';
import { binaryKind } from './binary.ts';
import { createTranscoder, decodeText, detectEncoding, type TextEncoding, textDecoder } from './encoding.ts';
import { findHeader, type HeaderSearch, type HeadLine, LINES_TRIED, type ScanHeader } from './header.ts';
import { finishScan } from './repairs.ts';
import { lineTooLong, RowFeed } from './row-feed.ts';
import { LINE_LIMIT, RowParser } from './row-parser.ts';

/** Bytes of head first looked at for a header; doubled while none is found, up to the limit. */
const HEAD_BYTES = 65_536;
/** Most headers end within these: only their lines are made into text then. */
const SHORT_HEAD_BYTES = 4096;
/** The header must stand within these first bytes (4 MiB). */
const HEAD_LIMIT = 4_194_304;

const LF = 10;
const CR = 13;

export interface ScanReader {
  push(chunk: Uint8Array): void;
  end(): ReadOutcome;
}

/** Reads a whole file in memory. `file` is its path, for the flags. */
export function readScan(bytes: Uint8Array, file: string): ReadOutcome {
  const reader = createScanReader(file);
  reader.push(bytes);
  return reader.end();
}

interface OpenRows {
  feed: RowFeed;
  header: ScanHeader;
  encoding: TextEncoding;
}

/**
 * A reader fed by chunks. Memory: the columns, the head (at most 4 MiB) and one line (at most 64 kB).
 * After a refusal further chunks are dropped unread; `end` gives the outcome.
 */
export function createScanReader(file: string): ScanReader {
  let head = new Uint8Array(HEAD_BYTES);
  let headLength = 0;
  let rows: OpenRows | undefined;
  let refusal: ReadRefusal | undefined;

  function tryHead(last: boolean): void {
    const opened = openHead(head.subarray(0, headLength), last, last || headLength >= HEAD_LIMIT);
    if (opened === undefined) {
      const larger = new Uint8Array(head.length * 2);
      larger.set(head);
      head = larger;
      return;
    }
    head = new Uint8Array(0);
    if ('refusal' in opened) refusal = opened.refusal;
    else rows = opened;
  }

  return {
    push(chunk) {
      let at = 0;
      while (rows === undefined && refusal === undefined && at < chunk.length) {
        const taken = Math.min(chunk.length - at, head.length - headLength);
        head.set(chunk.subarray(at, at + taken), headLength);
        headLength += taken;
        at += taken;
        if (headLength === head.length) tryHead(false);
      }
      if (rows !== undefined && at < chunk.length) rows.feed.push(chunk.subarray(at));
    },
    end() {
      const whole = rows === undefined;
      if (rows === undefined && refusal === undefined) tryHead(true);
      rows?.feed.end(!whole);
      refusal ??= rows?.feed.refusal;
      if (refusal !== undefined) return { ok: false, refusal };
      const { feed, header, encoding } = rows as OpenRows;
      const { columns, odd } = feed.parser;
      return finishScan({ file, header, columns, odd, openLine: feed.openLine, encoding: encoding.name });
    },
  };
}

/** Finds encoding and header in the head and starts on the rows; undefined = more bytes are needed (never when `final`). */
function openHead(bytes: Uint8Array, last: boolean, final: boolean): OpenRows | { refusal: ReadRefusal } | undefined {
  const encoding = detectEncoding(bytes);
  const unreadable = unreadableHead(bytes, encoding);
  if (unreadable !== undefined) return { refusal: unreadable };
  const transcode = createTranscoder(encoding);
  const body = bytes.subarray(encoding.markLength);
  const text = transcode === undefined ? body : transcode(body, last);
  const short = shortSearch(text, encoding);
  const lines = short ?? headLines(text, encoding, last);
  if ('refusal' in lines) return lines;
  const search = 'header' in lines ? lines : findHeader(lines);
  if ('header' in search && (search.matched || final)) {
    const { header } = search;
    const feed = new RowFeed(new RowParser(header, encoding), transcode);
    feed.pushText(text.subarray(header.dataOffset));
    return { feed, header, encoding };
  }
  return final ? { refusal: headRefusal(search, last) } : undefined;
}

function unreadableHead(bytes: Uint8Array, encoding: TextEncoding): ReadRefusal | undefined {
  if (bytes.every((byte) => byte === 0x20 || (byte >= 9 && byte <= 13)) || bytes.length <= encoding.markLength)
    return {
      code: 'file-damaged',
      reason:
        bytes.length === 0
          ? 'the file is empty (0 bytes)'
          : `the file holds nothing but blanks (${bytes.length} bytes)`,
      action: 'Copy or export the file again.',
    };
  const kind = encoding.name.startsWith('UTF-16') ? undefined : binaryKind(bytes);
  if (kind === undefined) return undefined;
  return {
    code: 'file-damaged',
    reason: `the file is no text but ${kind}: it starts with ${quote(decodeText(bytes.subarray(0, 24), { name: 'Latin-1', markLength: 0 }))}`,
    action: 'Export the scan as delimited text (.txt or .csv) and send that.',
    line: 1,
  };
}

function headRefusal(search: HeaderSearch, last: boolean): ReadRefusal {
  const refusal = 'refusal' in search ? search.refusal : undefined;
  if (refusal === undefined) throw new Error('a header was found and refused');
  return last ? refusal : { ...refusal, reason: `${refusal.reason}, within the first ${HEAD_LIMIT} bytes` };
}

/** A header within the first bytes that no further line could change. */
function shortSearch(text: Uint8Array, encoding: TextEncoding) {
  if (text.length <= SHORT_HEAD_BYTES) return undefined;
  const lines = headLines(text.subarray(0, SHORT_HEAD_BYTES), encoding, false);
  if ('refusal' in lines) return undefined;
  const search = findHeader(lines);
  const enough = 'header' in search && search.matched && lines.length >= search.header.dataLine + LINES_TRIED;
  return enough ? search : undefined;
}

/** Lines of the head; the last, unfinished one only when the file ends here. */
function headLines(bytes: Uint8Array, encoding: TextEncoding, last: boolean): HeadLine[] | { refusal: ReadRefusal } {
  const lines: HeadLine[] = [];
  const decoder = textDecoder(encoding);
  let start = 0;
  while (start < bytes.length) {
    let end = start;
    while (end < bytes.length && bytes[end] !== LF && bytes[end] !== CR) end++;
    if (end - start > LINE_LIMIT) return { refusal: lineTooLong(lines.length + 1) };
    // A CR at the very end may be half of a CRLF.
    if (!last && (end === bytes.length || (bytes[end] === CR && end + 1 === bytes.length))) break;
    const next = bytes[end] === CR && bytes[end + 1] === LF ? end + 2 : end + 1;
    lines.push({ text: decoder.decode(bytes.subarray(start, end)), line: lines.length + 1, next });
    start = next;
  }
  return lines;
}

import type { Ports } from '../ports/index.ts';

/** Largest file taken, bytes (INTERFACES, Limits). */
export const FILE_LIMIT_BYTES = 100e6;

export interface FileReceipt {
  /** The path as sent. */
  file: string;
  outcome: 'accepted' | 'known' | 'replaced' | 'sheet' | 'archive' | 'refused';
  scan_ids?: string[];
  job_id?: string;
  reason?: string;
}

/**
 * Takes one file: bytes to the blob store, hashed on the way, then one batch with its rows and job.
 * Refuses only for size, path or name; what the bytes are worth is decided by the jobs.
 * @param length in bytes where known (Content-Length); a body of another length is refused
 * Throws StoreRefusal `campaign-unknown`.
 */
export async function receiveFile(
  _ports: Ports,
  _campaignId: string,
  _path: string,
  _body: ReadableStream<Uint8Array> | Uint8Array,
  _length?: number,
): Promise<FileReceipt> {
  throw new Error('not written yet');
}

/** Marks every live file whose path is not in `paths` superseded, so that results describe a folder as it is now. Returns the paths withdrawn. */
export async function withdrawMissingFiles(
  _ports: Ports,
  _campaignId: string,
  _paths: ReadonlySet<string>,
): Promise<string[]> {
  throw new Error('not written yet');
}

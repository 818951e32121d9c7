import { type Signal, signal } from '@preact/signals';
import { sendFile } from '../client/campaigns.ts';
import { asProblem } from '../client/request.ts';
import type { FileOutcome } from '../client/rows.ts';
import type { ChosenFile } from '../upload/collect.ts';
import { planUpload } from '../upload/paths.ts';

export type UploadState = 'waiting' | 'sending' | 'left out' | 'not sent' | FileOutcome['outcome'];

export interface UploadItem {
  path: string;
  bytes: number;
  state: UploadState;
  /** Why it was refused, left out or not sent, and what to do. */
  reason?: string;
}

export interface Uploads {
  items: Signal<readonly UploadItem[]>;
  /** Adds files and sends them; resolves when all of them have an outcome. */
  add(chosen: readonly ChosenFile[]): Promise<void>;
  /** Sends again what was not sent. */
  retry(): Promise<void>;
  /** Forgets the outcomes shown. */
  clear(): void;
}

const AT_ONCE = 3;

export const isPending = (item: UploadItem): boolean => item.state === 'waiting' || item.state === 'sending';

/** The upload queue of one campaign page. */
export function createUploads(campaignId: string): Uploads {
  const items = signal<readonly UploadItem[]>([]);
  const files = new Map<string, File>();

  const update = (path: string, change: Partial<UploadItem>): void => {
    items.value = items.value.map((item) => (item.path === path ? { ...item, ...change } : item));
  };

  const send = async (path: string): Promise<void> => {
    const file = files.get(path);
    if (!file) return;
    update(path, { state: 'sending', reason: undefined });
    try {
      const { outcome, reason } = await sendFile(campaignId, path, file);
      files.delete(path);
      update(path, { state: outcome, reason });
    } catch (error) {
      const { status, detail, action } = asProblem(error);
      update(path, { state: status === 413 || status === 422 ? 'refused' : 'not sent', reason: `${detail} ${action}` });
    }
  };

  const sendAll = async (paths: readonly string[]): Promise<void> => {
    const queue = [...paths];
    const work = async (): Promise<void> => {
      for (let path = queue.shift(); path !== undefined; path = queue.shift()) await send(path);
    };
    await Promise.all(Array.from({ length: AT_ONCE }, work));
  };

  return {
    items,
    async add(chosen) {
      const planned = planUpload(chosen);
      const paths = new Set(planned.map((p) => p.path));
      for (const { path, chosen: c, leftOut } of planned) if (!leftOut) files.set(path, c.file);
      items.value = [
        ...items.value.filter((item) => !paths.has(item.path)),
        ...planned.map(
          ({ path, chosen: c, leftOut }): UploadItem => ({
            path,
            bytes: c.file.size,
            state: leftOut ? 'left out' : 'waiting',
            reason: leftOut,
          }),
        ),
      ];
      await sendAll(planned.filter((p) => !p.leftOut).map((p) => p.path));
    },
    retry: () => sendAll(items.value.filter((item) => item.state === 'not sent').map((item) => item.path)),
    clear: () => {
      items.value = items.value.filter(isPending);
    },
  };
}

import { useSignal } from '@preact/signals';
import { useEffect, useRef } from 'preact/hooks';
import { formatBytes, formatCount } from '../format.ts';
import { isPending, type UploadItem, type Uploads } from '../state/uploads.ts';
import { collectDrop, collectInput } from '../upload/collect.ts';

/** Words for an outcome, and whether it needs a look. */
const OUTCOMES: Record<UploadItem['state'], { words: string; needsLook?: true }> = {
  waiting: { words: 'waiting' },
  sending: { words: 'sending' },
  accepted: { words: 'accepted, will be read' },
  known: { words: 'already here, the same bytes' },
  replaced: { words: 'replaces an older file' },
  sheet: { words: 'sheet, read for its rows' },
  archive: { words: 'archive, will be unpacked' },
  refused: { words: 'refused', needsLook: true },
  'left out': { words: 'left out' },
  'not sent': { words: 'not sent', needsLook: true },
};

/** What became of each file sent, those that need a look first. */
export function Outcomes({ uploads }: { uploads: Uploads }) {
  const items = uploads.items.value;
  if (items.length === 0) return null;
  const pending = items.filter(isPending).length;
  const troubled = items.filter((item) => OUTCOMES[item.state].needsLook);
  const calm = items.filter((item) => !OUTCOMES[item.state].needsLook);
  return (
    <div class="outcomes">
      <p aria-live="polite">
        {pending > 0
          ? `Sending: ${items.length - pending} of ${formatCount(items.length, 'file')} done`
          : `${formatCount(items.length, 'file')}: ${countOutcomes(items)}`}
      </p>
      <progress class="unseen-print" max={items.length} value={items.length - pending} aria-label="Files sent" />
      <ul class="outcome-list">
        {[...troubled, ...calm].map((item) => (
          <li key={item.path} class={OUTCOMES[item.state].needsLook ? 'needs-look' : ''}>
            <span class="file">{item.path}</span>
            <span class="bytes">{formatBytes(item.bytes)}</span>
            <span class="outcome">{OUTCOMES[item.state].words}</span>
            {item.reason && <span class="reason">{item.reason}</span>}
          </li>
        ))}
      </ul>
      <p class="outcome-actions">
        {items.some((item) => item.state === 'not sent') && (
          <button type="button" onClick={() => uploads.retry()}>
            Send the rest again
          </button>
        )}
        {pending === 0 && (
          <button type="button" class="quiet" onClick={() => uploads.clear()}>
            Close this list
          </button>
        )}
      </p>
    </div>
  );
}

function countOutcomes(items: readonly UploadItem[]): string {
  const counts = new Map<string, number>();
  for (const { state } of items) counts.set(state, (counts.get(state) ?? 0) + 1);
  return [...counts].map(([state, n]) => `${n} ${state}`).join(', ');
}

/** Where files come in: drop anywhere on the page, or choose files or a folder by keyboard or pointer. */
export function FileDesk({ uploads, isEmpty }: { uploads: Uploads; isEmpty: boolean }) {
  const fileInput = useRef<HTMLInputElement>(null);
  const folderInput = useRef<HTMLInputElement>(null);
  const isOver = useSignal(false);
  const trouble = useSignal('');

  useEffect(() => {
    const abort = new AbortController();
    const options = { signal: abort.signal };
    let depth = 0;
    const holdsFiles = (event: DragEvent): boolean => event.dataTransfer?.types.includes('Files') ?? false;
    addEventListener(
      'dragenter',
      (event) => {
        if (holdsFiles(event)) isOver.value = ++depth > 0;
      },
      options,
    );
    addEventListener(
      'dragleave',
      (event) => {
        if (holdsFiles(event)) isOver.value = --depth > 0;
      },
      options,
    );
    addEventListener('dragover', (event) => holdsFiles(event) && event.preventDefault(), options);
    addEventListener(
      'drop',
      async (event) => {
        if (!holdsFiles(event) || !event.dataTransfer) return;
        event.preventDefault();
        depth = 0;
        isOver.value = false;
        trouble.value = '';
        try {
          await uploads.add(await collectDrop(event.dataTransfer));
        } catch (error) {
          trouble.value = `The dropped files could not be read (${error}). Choose them with the buttons instead.`;
        }
      },
      options,
    );
    return () => abort.abort();
  }, [uploads]);

  const take = (event: Event): void => {
    const input = event.currentTarget as HTMLInputElement;
    if (input.files) void uploads.add(collectInput(input.files));
    // The same choice again must be heard too.
    input.value = '';
  };
  return (
    <section class={`file-desk ${isEmpty ? 'is-empty' : ''}`} aria-label="Add files">
      <div class="file-desk-line">
        <p>
          {isEmpty
            ? 'Drop the campaign folder here: exported text files, the sheets beside them, or archives of both.'
            : 'Drop files anywhere, or'}
        </p>
        <button type="button" onClick={() => folderInput.current?.click()}>
          Choose folder
        </button>
        <button type="button" onClick={() => fileInput.current?.click()}>
          Choose files
        </button>
        <input ref={folderInput} type="file" multiple hidden {...{ webkitdirectory: true }} onChange={take} />
        <input ref={fileInput} type="file" multiple hidden onChange={take} />
      </div>
      {isEmpty && <FolderHelp />}
      {trouble.value && <p role="alert">{trouble.value}</p>}
      {isOver.value && (
        <div class="drop-cover" aria-hidden="true">
          <p class="drop-words">Let go to add these files</p>
        </div>
      )}
    </section>
  );
}

function FolderHelp() {
  return (
    <dl class="folder-help">
      <dt>SAMPLE/INSTRUMENT/scan.txt</dt>
      <dd>Without sheets, the folders say what each file is.</dd>
      <dt>scans.csv</dt>
      <dd>
        One row a scan: file, sample, instrument; mass, heating rate, exotherm direction where the file does not say.
      </dd>
      <dt>instruments.csv</dt>
      <dd>Thermal lag and temperature offset of each instrument, if known.</dd>
      <dt>samples.csv</dt>
      <dd>Melting temperature and what else is known of each material.</dd>
    </dl>
  );
}

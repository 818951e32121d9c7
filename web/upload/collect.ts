/** A file chosen or dropped, with the path it had below what was chosen. */
export interface ChosenFile {
  path: string;
  file: File;
}

const readBatch = (reader: FileSystemDirectoryReader): Promise<FileSystemEntry[]> =>
  new Promise((resolve, reject) => reader.readEntries(resolve, reject));

async function collectEntry(entry: FileSystemEntry, into: ChosenFile[]): Promise<void> {
  if (entry.isFile) {
    const file = await new Promise<File>((resolve, reject) => (entry as FileSystemFileEntry).file(resolve, reject));
    into.push({ path: entry.fullPath.replace(/^\//, ''), file });
    return;
  }
  const reader = (entry as FileSystemDirectoryEntry).createReader();
  // A directory is given in batches; an empty batch ends it.
  for (let batch = await readBatch(reader); batch.length > 0; batch = await readBatch(reader)) {
    for (const child of batch) await collectEntry(child, into);
  }
}

/** Files of a drop, folders walked through. Must be called within the drop event: the list is emptied after it. */
export async function collectDrop(transfer: DataTransfer): Promise<ChosenFile[]> {
  const entries: FileSystemEntry[] = [];
  const loose: ChosenFile[] = [];
  for (const item of transfer.items) {
    if (item.kind !== 'file') continue;
    const entry = item.webkitGetAsEntry?.();
    const file = entry ? null : item.getAsFile();
    if (entry) entries.push(entry);
    else if (file) loose.push({ path: file.name, file });
  }
  for (const entry of entries) await collectEntry(entry, loose);
  return loose;
}

/** Files of an `<input type="file">`, with their folder path where a folder was chosen. */
export const collectInput = (files: FileList): ChosenFile[] =>
  [...files].map((file) => ({ path: file.webkitRelativePath || file.name, file }));

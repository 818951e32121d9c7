/** Hands a file to the browser to save, named by its parts. */
export function saveFile(blob: Blob, nameParts: readonly (string | undefined)[], extension: string): void {
  const name = nameParts
    .filter((part) => part !== undefined && part !== '')
    .join('-')
    .replace(/[^\p{L}\p{N}]+/gu, '-');
  const url = URL.createObjectURL(blob);
  const link = document.createElement('a');
  link.href = url;
  link.download = `${name}.${extension}`;
  link.click();
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}

/**
 * Puts text on the clipboard. The promise of the text is handed over within the click, since browsers allow no later write.
 * Rejects where the browser gives no clipboard (a page that is neither https nor loopback).
 */
export async function copyText(text: Promise<string>): Promise<void> {
  if (!navigator.clipboard) throw new Error('this browser gives the page no clipboard; save the file instead');
  const blob = text.then((content) => new Blob([content], { type: 'text/plain' }));
  await navigator.clipboard.write([new ClipboardItem({ 'text/plain': blob })]);
}

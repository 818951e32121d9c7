import type { CampaignFolder } from './campaign-folder.ts';
import type { Client } from './client.ts';
import { progressBar, type Terminal } from './terminal.ts';

export interface SentFolder {
  /** Files by what became of them. */
  outcomes: Record<string, number>;
  refused: { file: string; reason: string }[];
}

/** Uploads the files one by one in their order (sheets first). */
export async function sendFolder(
  client: Client,
  campaign: string,
  { files, skipped }: CampaignFolder,
  terminal: Terminal,
): Promise<SentFolder> {
  for (const sentence of skipped) terminal.note(`not sent: ${sentence}`);
  const sent: SentFolder = { outcomes: {}, refused: [] };
  const startedMs = performance.now();
  for (const [i, file] of files.entries()) {
    terminal.interrupt.throwIfAborted();
    const leftS = i > 0 ? (((performance.now() - startedMs) / i) * (files.length - i)) / 1000 : undefined;
    terminal.progress(progressBar(i, files.length, 'files sent', leftS));
    const { outcome, reason } = await client.putFile(campaign, file);
    sent.outcomes[outcome] = (sent.outcomes[outcome] ?? 0) + 1;
    if (outcome !== 'refused') continue;
    sent.refused.push({ file: file.path, reason: reason ?? 'no reason given' });
    terminal.warn(`refused: ${file.path}: ${reason}`);
  }
  terminal.progress();
  return sent;
}

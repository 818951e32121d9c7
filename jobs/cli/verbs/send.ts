import { wrongUsage } from '../arguments.ts';
import { listCampaignFolder } from '../campaign-folder.ts';
import { clientFromArguments } from '../client.ts';
import { EXIT, UsageError } from '../exit.ts';
import { followCampaign } from '../follow.ts';
import { sendFolder } from '../send-folder.ts';
import type { Terminal } from '../terminal.ts';

const DEFAULT_SERVER = 'http://127.0.0.1:8787';

/** `send FOLDER --campaign NAME`: uploads a folder through the HTTP interface. */
export async function send(
  [folder]: string[],
  values: Record<string, string | boolean | undefined>,
  terminal: Terminal,
): Promise<number> {
  if (values.campaign === undefined) throw wrongUsage('send', '--campaign NAME is missing');
  const client = clientFromArguments(values, DEFAULT_SERVER)!;
  const listed = await listCampaignFolder(folder);
  if (listed.files.length === 0) throw new UsageError(`the folder ${folder} holds no file to send`);
  const campaign = await client.openCampaign(String(values.campaign));
  const { outcomes, refused } = await sendFolder(client, campaign, listed, terminal);
  const counts = Object.entries(outcomes).map(([outcome, n]) => `${n} ${outcome}`);
  terminal.note(`sent ${listed.files.length} files to campaign ${String(values.campaign)}: ${counts.join(', ')}`);
  const status = values.wait ? await followCampaign(() => client.status(campaign), terminal) : undefined;
  if (values.json) terminal.out(`${JSON.stringify({ campaign, outcomes, refused, status }, null, 2)}\n`);
  if (status) {
    const fitted = status.samples.filter((s) => s.state === 'fitted').length;
    terminal.note(`settled: ${fitted} of ${status.samples.length} samples fitted, ${status.jobs.failed} jobs failed`);
    if (status.jobs.failed > 0) return EXIT.failed;
    if (refused.length === 0 && fitted === 0) return EXIT.nothingFitted;
  }
  return refused.length > 0 ? EXIT.server : EXIT.done;
}

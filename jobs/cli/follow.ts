import { setTimeout as sleep } from 'node:timers/promises';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { SETTLED_SCAN_STATES } from '../../schema/wire/states.ts';
import { progressBar, type Terminal } from './terminal.ts';

/** Time between two looks at the status, ms. */
const LOOK_EVERY_MS = 300;

/**
 * Shows the campaign's progress until `done` settles or, without it, until the status says settled.
 * Rejects with the interrupt's reason when the user stops.
 */
export async function followCampaign(
  readStatus: () => Promise<CampaignStatus>,
  terminal: Terminal,
  done?: Promise<void>,
): Promise<CampaignStatus> {
  let finished = false;
  const work = done?.then(() => {
    finished = true;
  });
  for (;;) {
    terminal.interrupt.throwIfAborted();
    const status = await readStatus();
    if (done ? finished : status.settled) {
      terminal.progress();
      return status;
    }
    terminal.progress(progressText(status));
    const pause = sleep(LOOK_EVERY_MS);
    await (work ? Promise.race([work, pause]) : pause);
  }
}

function progressText({ scans, samples, jobs, eta_s }: CampaignStatus): string {
  const total = Object.values(scans).reduce((a, b) => a + b, 0);
  const settled = SETTLED_SCAN_STATES.reduce((sum, state) => sum + scans[state], 0);
  const fitted = samples.filter((s) => s.state === 'fitted' || s.state === 'insufficient').length;
  return `${progressBar(settled, total, 'scans', eta_s)}, ${fitted}/${samples.length} samples, ${jobs.queued + jobs.running} jobs`;
}

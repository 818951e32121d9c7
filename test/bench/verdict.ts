import { judgeCurvature } from '../../jobs/glass/index.ts';
import { seededRandom } from '../study/generator/random.ts';
import { drawCampaign } from '../study/verdict-campaigns.ts';

/**
 * `npx tsx test/bench/verdict.ts`: time of one verdict with everything that goes with it (shared law and its draws, second opinions, glass
 * layer, plots) for 22 scans on two instruments and 400 draws, in one thread. Prints every round, the first ones while the engine warms up.
 */
const ROUNDS = 12;
for (const kind of ['straight', 'bent', 'glass'] as const) {
  const { input } = drawCampaign(seededRandom(`bench-${kind}`), 'bench', { kind, replicates: 2, lags: 'right' });
  const times = Array.from({ length: ROUNDS }, () => {
    const started = process.cpuUsage();
    judgeCurvature({ ...input, draws: 400 });
    const { user, system } = process.cpuUsage(started);
    return (user + system) / 1e3;
  });
  process.stdout.write(
    `${kind}: ${input.scans.length} scans, CPU ms by round: ${times.map((t) => t.toFixed(0)).join(' ')}\n`,
  );
}

import { fitMoynihan } from '../../jobs/glass/fragility.ts';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import type { JudgeResult } from '../../schema/wire/verdicts.ts';
import { seededRandom } from './generator/random.ts';
import { glassTransitionAtRate, R } from './generator/temperature-laws.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';
import { type CampaignWish, drawCampaign, LAG_CASES, type VerdictCampaign } from './verdict-campaigns.ts';

export const STRAIGHT_WITHIN = Math.log(1.15);
const VERDICTS = ['straight', 'instrument', 'material', 'undecided'] as const;

export interface VerdictRun {
  campaign: VerdictCampaign;
  result: JudgeResult;
  verdict: (typeof VERDICTS)[number];
  /** verdict once the advised scans are there; undefined where there was nothing to advise */
  settled?: (typeof VERDICTS)[number];
  advisedScans: number;
  milliseconds: number;
}

/** One campaign judged, and where undecided judged again with the advised scans. @param now a clock in ms, for the timing only */
export function runCampaign(seed: string, wish: CampaignWish = {}, now: () => number = () => 0): VerdictRun {
  const random = seededRandom(`verdict/${seed}`);
  const campaign = drawCampaign(random, seed, wish);
  const started = now();
  const result = judgeCurvature(campaign.input);
  const milliseconds = now() - started;
  const [event] = result.events;
  const run: VerdictRun = { campaign, result, verdict: event.row.verdict, advisedScans: 0, milliseconds };
  if (event.deciding.length > 0) {
    const more = event.deciding.flatMap((d) =>
      Array.from({ length: d.scans }, (_, k) => campaign.measure(d.instrument, d.rateKPerS, `advised-${k}`)),
    );
    run.advisedScans = more.length;
    run.settled = judgeCurvature({
      ...campaign.input,
      scans: [...campaign.input.scans, ...more],
    }).events[0].row.verdict;
  }
  return run;
}

export type Truth = 'straight, lags right' | 'straight, lags wrong' | 'bent slightly' | 'bent';

export function truthOf({ kind, lags, trueBend }: VerdictCampaign): Truth {
  if (kind === 'straight') return lags === 'right' ? 'straight, lags right' : 'straight, lags wrong';
  return Math.abs(trueBend) < STRAIGHT_WITHIN ? 'bent slightly' : 'bent';
}

/** A verdict that says what is not so. Below 15 % of E a bend may be called either way; a lag too small to see may be missed. */
export function isFalse(truth: Truth, verdict: VerdictRun['verdict']): boolean {
  if (truth === 'bent') return verdict === 'straight' || verdict === 'instrument';
  if (truth === 'bent slightly') return false;
  return verdict === 'material' || (truth === 'straight, lags right' && verdict === 'instrument');
}

export function verdictStudy({ count = 400, seed }: StudyOptions): string {
  const cpuMs = () => {
    const { user, system } = process.cpuUsage();
    return (user + system) / 1e3;
  };
  const runs = Array.from({ length: count }, (_, k) => runCampaign(`${seed}/${k}`, {}, cpuMs));
  const unknownMelting = Array.from({ length: Math.ceil(count / 4) }, (_, k) =>
    runCampaign(`${seed}/no-melting/${k}`, { kind: 'glass', meltingUnknown: true }),
  );
  return [
    '### Confusion matrix: campaigns by truth and verdict',
    confusion(runs),
    '### The same with a bridging rate',
    confusion(runs.filter((r) => r.campaign.bridged)),
    '### Verdict by what is wrong with the lags (straight materials)',
    byLags(runs),
    '### Aims',
    aims(runs),
    '### Errors and intervals',
    errors(runs),
    '### Glass formers without melting data',
    errors(unknownMelting),
    '### m from Tg(β) alone',
    fragilities(seed),
  ].join('\n\n');
}

const TRUTHS: Truth[] = ['straight, lags right', 'straight, lags wrong', 'bent slightly', 'bent'];

function confusion(runs: VerdictRun[]): string {
  return markdownTable(
    ['truth', ...VERDICTS],
    TRUTHS.map((truth) => {
      const own = runs.filter((r) => truthOf(r.campaign) === truth);
      return [truth, ...VERDICTS.map((v) => own.filter((r) => r.verdict === v).length)];
    }),
  );
}

function byLags(runs: VerdictRun[]): string {
  const straight = runs.filter((r) => r.campaign.kind === 'straight');
  return markdownTable(
    ['lags', ...VERDICTS],
    LAG_CASES.map((lags) => [
      lags,
      ...VERDICTS.map((v) => straight.filter((r) => r.campaign.lags === lags && r.verdict === v).length),
    ]),
  );
}

function aims(runs: VerdictRun[]): string {
  const share = (some: VerdictRun[], of: VerdictRun[]) =>
    `${some.length} of ${of.length} (${percent(some.length / of.length, 1)})`;
  const wrong = runs.filter((r) => isFalse(truthOf(r.campaign), r.verdict));
  const as = (v: VerdictRun['verdict']) =>
    share(
      wrong.filter((r) => r.verdict === v),
      runs,
    );
  const bridged = runs.filter((r) => r.campaign.bridged);
  const undecided = runs.filter((r) => r.verdict === 'undecided');
  const advised = runs.filter((r) => r.settled !== undefined);
  const times = runs.map((r) => r.milliseconds);
  return markdownTable(
    ['aim', 'found'],
    [
      ['false material < 1 %', as('material')],
      ['false straight < 1 %', as('straight')],
      ['false instrument < 1 %', as('instrument')],
      ['undecided, all', share(undecided, runs)],
      [
        'undecided with a bridging rate < 10 %',
        share(
          bridged.filter((r) => r.verdict === 'undecided'),
          bridged,
        ),
      ],
      [
        'settled by the advised scans > 80 %',
        share(
          advised.filter((r) => r.settled !== 'undecided'),
          advised,
        ),
      ],
      [
        '… wrongly',
        share(
          advised.filter((r) => r.settled && isFalse(truthOf(r.campaign), r.settled)),
          advised,
        ),
      ],
      [
        'advised scans, median / most',
        `${quantile(
          advised.map((r) => r.advisedScans),
          0.5,
        )} / ${Math.max(0, ...advised.map((r) => r.advisedScans))}`,
      ],
      ['true bend within the 99 % interval', share(runs.filter(holdsBend), runs)],
      [
        'CPU time a verdict, median / 95 %, ms',
        `${quantile(times, 0.5).toFixed(0)} / ${quantile(times, 0.95).toFixed(0)}`,
      ],
    ],
  );
}

function holdsBend({ campaign, result }: VerdictRun): boolean {
  const { bend_lower99, bend_upper99 } = result.events[0].row;
  return (bend_lower99 ?? 0) <= campaign.trueBend && (bend_upper99 ?? 0) >= campaign.trueBend;
}

interface Compared {
  quantity: string;
  /** absolute or relative error, and whether the interval held the truth */
  error: number;
  held: boolean;
}

/** Every printed number whose truth is known. */
function compare({ campaign: c, result }: VerdictRun): Compared[] {
  const out: Compared[] = [];
  const add = (
    quantity: string,
    row: JudgeResult['parameters'][number] | undefined,
    truth: number,
    relative: boolean,
  ) => {
    if (!row) return;
    const held =
      (row.lower95 ?? Number.NEGATIVE_INFINITY) <= truth && (row.upper95 ?? Number.POSITIVE_INFINITY) >= truth;
    out.push({ quantity, error: Math.abs(row.value - truth) / (relative ? truth : 1), held });
  };
  const rows = (quantity: string, method: string) =>
    result.parameters.filter((p) => p.quantity === quantity && p.method === method);
  const energies = rows('local_activation_energy', 'shared_law');
  const decided = result.verdicts[0].verdict === 'undecided' ? ', undecided' : '';
  const at = (row: (typeof energies)[number] | undefined) => c.law.localEnergy(row?.temperature_K ?? Number.NaN) / 1e3;
  const places = [
    ['low-rate end', energies[0]],
    ['middle', energies[(energies.length - 1) / 2]],
    ['high-rate end', energies[energies.length - 1]],
  ] as const;
  for (const [place, row] of places) {
    add(`E, ${place}, ${c.kind}${decided}`, row, at(row), true);
    add(`E, ${place}, all`, row, at(row), true);
  }
  if (c.former) {
    const Tg = glassTransitionAtRate(c.former, 10 / 60);
    const h = 1e-3;
    // d ln β/d(1/Tg) from the generator's own Tg(β)
    const energy =
      (-R * 2 * h) /
      (1 / glassTransitionAtRate(c.former, (10 / 60) * Math.exp(h)) -
        1 / glassTransitionAtRate(c.former, (10 / 60) * Math.exp(-h)));
    add('m from Tg(β)', rows('fragility', 'moynihan')[0], energy / (Math.LN10 * R * Tg), false);
    add('m from a viscosity table', rows('fragility', 'viscosity')[0], c.former.fragility, false);
    add('ξ', rows('decoupling_exponent', 'shared_law')[0], c.decoupling ?? Number.NaN, false);
  }
  out.push({
    quantity: 'Avrami n',
    error: Math.abs((result.sharedLaws[0]?.law.avramiExponent ?? Number.NaN) / c.exponent - 1),
    held: true,
  });
  return out;
}

function errors(runs: VerdictRun[]): string {
  const all = runs.flatMap(compare).filter((x) => Number.isFinite(x.error));
  const names = [...new Set(all.map((x) => x.quantity))].sort();
  return markdownTable(
    ['quantity', 'count', 'median error', '95 % of errors', 'worst', '95 % interval holds the truth'],
    names.map((name) => {
      const own = all.filter((x) => x.quantity === name);
      const relative = name.startsWith('E') || name.startsWith('Avrami');
      const show = (v: number) => (relative ? percent(v) : v.toFixed(3));
      const of = own.map((x) => x.error);
      return [
        name,
        own.length,
        show(quantile(of, 0.5)),
        show(quantile(of, 0.95)),
        show(Math.max(...of)),
        name.startsWith('Avrami') ? '–' : percent(own.filter((x) => x.held).length / own.length, 1),
      ];
    }),
  );
}

const FRAGILITIES = 1000;

/** m of made-up liquids from five glass transitions with a scatter of 0.1 K, each cooled at its heating rate. */
function fragilities(seed: string): string {
  const spans = [
    [0.05, 0.16, 0.5, 1.6, 5],
    [0.05, 0.5, 5, 50, 5000],
  ];
  return markdownTable(
    ['rates, K/s', 'count', 'median error', '95 % of errors', '95 % interval holds the truth'],
    spans.map((rates) => {
      const random = seededRandom(`${seed}/fragilities/${rates}`);
      const found = Array.from({ length: FRAGILITIES }, () => {
        const former = {
          glassTransitionK: random.between(350, 800),
          fragility: random.between(30, 120),
          log10Infinity: -2.93,
        };
        const seen = rates.map((rate) => glassTransitionAtRate(former, rate) + 0.1 * random.normal());
        const fit = fitMoynihan(rates, seen);
        if (!fit) throw new Error(`no fit of the glass transitions ${seen}`);
        const [low, high] = fit.fragility95;
        return {
          error: Math.abs(fit.fragility - former.fragility),
          held: low <= former.fragility && former.fragility <= high,
        };
      });
      const of = found.map((f) => f.error);
      return [
        `${rates[0]} … ${rates[rates.length - 1]}`,
        FRAGILITIES,
        quantile(of, 0.5).toFixed(2),
        quantile(of, 0.95).toFixed(2),
        percent(found.filter((f) => f.held).length / FRAGILITIES, 1),
      ];
    }),
  );
}

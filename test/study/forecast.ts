import { answerQuestion, createForecaster } from '../../jobs/forecast/index.ts';
import { FIT_DRAWS } from '../../jobs/steps/settings.ts';
import { drawForecastCampaign, type MaterialKind, sourceOfCampaign, trueLnTime } from './forecast-campaigns.ts';
import { createProgramme, jmakLaw, seededRandom, solveScan } from './generator/index.ts';
import type { StudyOptions } from './registry.ts';
import { markdownTable, percent, quantile } from './table.ts';

/** The model-free part costs most: every fourth campaign has it. */
const MODEL_FREE_EVERY = 4;
const KINDS: readonly MaterialKind[] = ['straight', 'bent', 'bent-glass'];

export interface ForecastTrial {
  kind: MaterialKind;
  side: 'below' | 'above';
  /** a bend called the material’s where there is one, straight where there is none */
  verdictRight: boolean;
  sharedHolds: boolean;
  /** shared law's estimate ÷ truth, ln */
  sharedLnError: number;
  sharedLnWidth: number;
  /** missing where the campaign was run without the model-free part */
  free?: { holds: boolean; lnError: number; flags: readonly string[] };
}

/** One campaign and one question, 20 to 80 K outside the measured temperatures, below or above; the glass only below. */
export function tryForecast(
  seed: string,
  kind: MaterialKind,
  draws = FIT_DRAWS,
  withModelFree = true,
): ForecastTrial | undefined {
  const random = seededRandom(`forecast-question/${seed}/${kind}`);
  const campaign = drawForecastCampaign(seed, kind);
  const made = sourceOfCampaign(campaign, seed, draws, withModelFree);
  if (!made) return undefined;
  const side = kind === 'bent-glass' || random.fork('side').integer(2) === 0 ? 'below' : 'above';
  const away = random.between(20, 80);
  const temperatureK = side === 'below' ? campaign.lowK - away : campaign.highK + away;
  const conversion = random.pick([0.01, 0.5]);
  const truth = trueLnTime(campaign, conversion, temperatureK);
  const [shared, free] = createForecaster(made.source)({ question: 'time_to_conversion', conversion, temperatureK });
  const ln = (x: number | null) => Math.log(x ?? Number.NaN);
  const holds = (row: typeof shared) => ln(row.lower95) <= truth && truth <= ln(row.upper95);
  return {
    kind,
    side,
    verdictRight: made.verdict === (kind === 'straight' ? 'straight' : 'material'),
    sharedHolds: holds(shared),
    sharedLnError: ln(shared.value) - truth,
    sharedLnWidth: ln(shared.upper95) - ln(shared.lower95),
    ...(free && { free: { holds: holds(free), lnError: ln(free.value) - truth, flags: free.flags } }),
  };
}

/**
 * A simulated hold on the furnace material: reached by a fast ramp, followed by the independent integrator, against the forecast from ramps of other
 * rates. Relative errors of the time to α = 0.5 by both methods, along the hold's own programme.
 */
export function tryHold(seed: string): { shared: number; free: number } | undefined {
  const random = seededRandom(`forecast-hold/${seed}`);
  const campaign = drawForecastCampaign(seed, 'straight', false);
  const made = sourceOfCampaign(campaign, seed, 30);
  if (!made) return undefined;
  const holdK = campaign.lowK - random.between(0, 30);
  const guess = Math.exp(trueLnTime(campaign, 0.5, holdK));
  const startK = holdK - 150;
  const legs = [
    { kind: 'ramp', rateKPerS: 5, toK: holdK },
    { kind: 'hold', durationS: 3 * guess },
  ] as const;
  const programme = createProgramme(startK, legs);
  const times = Float64Array.from({ length: 4001 }, (_, i) => 30 + (i * (programme.endS - 30)) / 4000);
  const truth = solveScan(
    {
      sample: { events: [{ temperature: campaign.law, rate: jmakLaw(campaign.exponent), enthalpyJPerKg: 1 }] },
      instrument: { offsetK: 0, shiftS: 0, responseS: 0 },
      programme,
      massKg: 1,
    },
    times,
  );
  const alpha = truth.conversion[0];
  const k = alpha.findIndex((a) => a >= 0.5);
  const trueS = times[k - 1] + ((0.5 - alpha[k - 1]) / (alpha[k] - alpha[k - 1])) * (times[k] - times[k - 1]);
  const table = {
    name: '',
    timeS: Float64Array.of(0, 30, programme.endS),
    temperatureK: Float64Array.of(startK, holdK, holdK),
  };
  const rows = answerQuestion(made.source, { question: 'time_to_conversion', conversion: 0.5, programme: table });
  // The ramp is part of the programme; the time meant is that of the hold.
  const error = (value: number | null) => ((value ?? Number.NaN) - 30) / (trueS - 30) - 1;
  return { shared: error(rows[0].value), free: error(rows[1].value) };
}

export function forecastStudy({ count = 200, seed }: StudyOptions): string {
  const rows = KINDS.flatMap((kind) => {
    const all = Array.from({ length: count }, (_, i) =>
      tryForecast(`${seed}/${i}`, kind, FIT_DRAWS, i % MODEL_FREE_EVERY === 0),
    ).filter((t) => t !== undefined);
    const sides = kind === 'bent-glass' ? (['below'] as const) : (['below', 'above'] as const);
    return sides.map((side) => {
      const right = all.filter((t) => t.side === side && t.verdictRight);
      const free = right.flatMap((t) => (t.free ? [t.free] : []));
      const misses = free.filter((t) => !t.holds);
      const flagged = (codes: string[]) => misses.filter((t) => codes.some((c) => t.flags.includes(c))).length;
      return [
        kind,
        side,
        `${right.length} of ${all.filter((t) => t.side === side).length}`,
        percent(right.filter((t) => t.sharedHolds).length / right.length, 1),
        quantile(
          right.map((t) => Math.abs(t.sharedLnError) / Math.LN10),
          0.5,
        ).toFixed(3),
        quantile(
          right.map((t) => t.sharedLnWidth / Math.LN10),
          0.5,
        ).toFixed(3),
        `${percent(1 - misses.length / free.length, 1)} of ${free.length}`,
        quantile(
          free.map((t) => t.lnError / Math.LN10),
          0.5,
        ).toFixed(3),
        misses.length,
        flagged(['extrapolates', 'forecast-straight', 'forecasts-disagree']),
        flagged(['forecast-straight', 'forecasts-disagree']),
      ];
    });
  });
  const holds = Array.from({ length: Math.ceil(count / MODEL_FREE_EVERY) }, (_, i) => tryHold(`${seed}/${i}`)).filter(
    (h) => h !== undefined,
  );
  const holdRows = (['shared', 'free'] as const).map((method) => {
    const errors = holds.map((h) => Math.abs(h[method]));
    return [
      method,
      errors.length,
      percent(quantile(errors, 0.5)),
      percent(quantile(errors, 0.95)),
      percent(Math.max(...errors)),
      percent(errors.filter((e) => e <= 0.1).length / errors.length, 1),
    ];
  });
  return [
    '## 20 to 80 K outside the measured temperatures',
    markdownTable(
      [
        'law',
        'side',
        'verdict right',
        'shared law holds',
        '|error| decades',
        'band decades',
        'model-free holds',
        'model-free error decades',
        'model-free misses',
        'flagged',
        'flagged straight or disagreeing',
      ],
      rows,
    ),
    '## Holds at 0 to 30 K below the slowest scan, time to α = 0.5',
    markdownTable(['method', 'holds', 'median |error|', '95th percentile', 'worst', 'within 10 %'], holdRows),
  ].join('\n\n');
}

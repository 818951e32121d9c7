import { type Flag, flag } from '../../../schema/wire/flags.ts';
import type { FitScan } from '../../../schema/wire/parameters.ts';
import type {
  EventVerdict,
  GlassFacts,
  InstrumentRange,
  JudgeInput,
  LagEvidence,
  LawEvidence,
  VerdictRow,
} from '../../../schema/wire/verdicts.ts';
import { LAWS } from '../../../schema/wire/verdicts.ts';
import { createRandom } from '../../numeric/random.ts';
import { median } from '../../numeric/statistics.ts';
import { meltingOf } from '../driving-force.ts';
import { localEnergyOf } from '../shared-law-values.ts';
import { adviseScans } from './advice.ts';
import { analyseBend, type BendAnalysis, bendOf, degreesLeft, settleBend } from './analyse.ts';
import { collectJudged, type JudgedEvent, lawData } from './collect.ts';
import { type Decision, decide, LEAST_DEGREES, missingScans } from './decide.ts';
import { compareLaws, explain, lagInWords, scansInWords } from './sentences.ts';
import { exponentsUnder, fitSharedLaw, type SharedFit } from './shared-law.ts';

/** Rates that each kind of calorimeter usually reaches, K/s. */
const KIND_RATES = { furnace: [0.01, 8], chip: [10, 50_000] } as const;
/** A second opinion off by more than this many of the joint 99 % half widths is told. */
const OPINIONS_APART = 1;
const NEGATIVE_ERRORS = 2;
/** Here a driving force takes about 15 % off a local energy of 40 R T (entropy of melting 10 J/(mol K)). */
const NEAR_MELTING = 0.85;

export interface JudgedResult {
  verdict: EventVerdict;
  flags: Flag[];
  judged: JudgedEvent;
  analysis?: BendAnalysis;
  shared?: SharedFit;
}

/**
 * The verdict of one event.
 * @param scans chosen ones only, at least one   @param glassTransitionK below it forecasts hold E
 */
export function judgeEvent(
  input: JudgeInput,
  event: number,
  scans: FitScan[],
  glassTransitionK: number | undefined,
): JudgedResult {
  const where = { sample: input.sample, event };
  const random = createRandom(`${input.seed}:verdict:${event}`);
  const judged = collectJudged(event, scans, input.instruments);
  const what = judged.hasCentroid ? 'centroid' : 'peak';
  const flags: Flag[] = [];
  let { data, own } = lawData(judged, what);
  const left = degreesLeft(data);
  let analysis: BendAnalysis | undefined;
  if (left >= 1) {
    // A first pass for n alone, which the condition of the centroid needs.
    const first = settleBend(data, own);
    if (first) {
      judged.exponent = Math.min(6, Math.max(0.7, median(exponentsUnder(judged, data, first.full))));
      ({ data, own } = lawData(judged, what));
      const settled = settleBend(data, own, first.full);
      if (settled) analysis = analyseBend(data, own, settled, left >= LEAST_DEGREES ? random : undefined, input.draws);
    }
  }
  const decision: Decision =
    left < LEAST_DEGREES
      ? { verdict: 'undecided', reason: 'too-few-scans', missing: missingScans(data) }
      : analysis
        ? decide(analysis, !judged.hasCentroid, judged.widths)
        : { verdict: 'undecided', reason: 'fit-failed', missing: 0 };
  const shared =
    analysis &&
    fitSharedLaw(
      input.sample,
      judged,
      analysis,
      decision.verdict,
      glassTransitionK,
      random,
      input.draws,
      meltingOf(input.facts),
    );
  const lags = analysis ? lagEvidence(judged, analysis, decision) : [];
  const advice =
    analysis && decision.reason === 'interval-wide'
      ? adviseScans(
          analysis,
          judged.instruments.map((c) => c.instrument),
          rangesOf(input, judged),
        )
      : undefined;
  const laws = analysis ? lawEvidence(analysis) : [];
  const row = makeRow(input.sample, judged, decision, analysis, shared, laws);
  row.decides_next = decidesNext(decision, advice?.deciding ?? []);
  const otherOpinions = analysis && judged.hasCentroid ? secondOpinions(judged, analysis) : [];
  if (analysis) flags.push(...judgeFlags(where, decision, analysis, lags, otherOpinions, judged));
  if (decision.verdict === 'material' && shared) flags.push(...meltingFlags(where, input.facts, shared));
  if (decision.reason === 'too-few-scans') {
    flags.push(
      flag(
        'too-few-scans',
        `${data.n} scans on ${judged.instruments.length} instrument${judged.instruments.length === 1 ? '' : 's'} leave ${left} degrees of freedom to tell a bend from a lag (${LEAST_DEGREES} needed).`,
        `Add ${decision.missing} scans at rates that were not run yet.`,
        where,
      ),
    );
  }
  return {
    verdict: {
      row,
      reason: decision.reason,
      sentences: [
        ...explain(row, decision, lags, advice?.deciding ?? []),
        ...(shared?.rivals ? [compareLaws(shared.rivals)] : []),
      ],
      opinion: what,
      otherOpinions,
      laws,
      lags,
      stateDiffers: analysis?.stateDiffers ?? false,
      degreesOfFreedom: left,
      deciding: advice?.deciding ?? [],
      halfWidthNow: analysis ? analysis.halfWidth99 : null,
      halfWidthExpected: advice ? advice.halfWidthExpected : null,
      residuals: shared ? residualsByInstrument(judged, shared) : [],
      plots: [],
    },
    flags,
    judged,
    analysis,
    shared,
  };
}

/** A bent law without the driving force, on scans that come near melting: its local energy at the fast end rests on the bend's shape alone. */
function meltingFlags(where: { sample: string; event: number }, facts: GlassFacts, { law }: SharedFit): Flag[] {
  const { meltingK } = facts;
  if (law.driving || meltingK === undefined || law.highestMeasuredK < NEAR_MELTING * meltingK) return [];
  const known = meltingOf(facts) !== undefined;
  return [
    flag(
      'driving-force-ignored',
      `The fastest scan crystallises at ${law.highestMeasuredK.toFixed(0)} K, ${((100 * law.highestMeasuredK) / meltingK).toFixed(0)} % of the melting temperature of ${meltingK.toFixed(0)} K; the local energy there leaves the driving force out.`,
      known
        ? 'So near to melting its error would rule the law; check the melting temperature.'
        : 'Give the enthalpy of melting and the molar mass in samples.csv.',
      where,
    ),
  ];
}

function decidesNext(d: Decision, deciding: EventVerdict['deciding']): string {
  if (d.reason === 'too-few-scans') return `${d.missing} more scans at new rates`;
  if (d.reason === 'peaks-only') return 'the curves of these scans';
  return scansInWords(deciding);
}

function rangesOf(input: JudgeInput, judged: JudgedEvent): InstrumentRange[] {
  return judged.instruments.map(({ instrument, kind }) => {
    const stated = input.ranges?.find((r) => r.instrument === instrument);
    if (stated) return stated;
    const rates = judged.scans.filter((s) => s.instrument === instrument).map((s) => s.event.rateKPerS);
    const [low, high] = KIND_RATES[kind];
    return { instrument, rateMinKPerS: Math.min(low, ...rates), rateMaxKPerS: Math.max(high, ...rates) };
  });
}

const finite = (v: number | undefined): number | null => (v !== undefined && Number.isFinite(v) ? v : null);

function makeRow(
  sample: string,
  judged: JudgedEvent,
  decision: Decision,
  a: BendAnalysis | undefined,
  shared: SharedFit | undefined,
  laws: LawEvidence[],
): VerdictRow {
  const rates = judged.scans.map((s) => s.event.rateKPerS);
  const best = (names: readonly string[]) =>
    Math.min(...laws.filter((l) => names.includes(l.law)).map((l) => l.aicc ?? Number.POSITIVE_INFINITY));
  const driven = shared?.drivenBend;
  const energy = (T: number | undefined) =>
    shared && T !== undefined ? localEnergyOf(shared.law, T) / 1e3 : undefined;
  return {
    sample,
    event: judged.event,
    verdict: decision.verdict,
    bend: finite(driven?.bend ?? a?.bend),
    bend_lower99: finite(driven ? driven.bend - driven.halfWidth99 : a?.lower99),
    bend_upper99: finite(driven ? driven.bend + driven.halfWidth99 : a?.upper99),
    p_value: finite(a?.pValue),
    delta_aicc: finite(best(['A', 'L']) - best(['G', 'GL'])),
    energy_low_rate_kJ_per_mol: finite(energy(shared?.law.lowestMeasuredK)),
    energy_high_rate_kJ_per_mol: finite(energy(shared?.law.highestMeasuredK)),
    instruments: judged.instruments.map((c) => c.instrument),
    rate_min_K_per_s: Math.min(...rates),
    rate_max_K_per_s: Math.max(...rates),
    decides_next: '',
  };
}

function lawEvidence({ data: d, laws }: BendAnalysis): LawEvidence[] {
  return LAWS.map((law) => {
    const fit = laws[law];
    const k = (law === 'A' || law === 'L' ? 2 : 3) + (law === 'L' || law === 'GL' ? d.instruments : 0);
    const room = d.n - k - 1;
    return {
      law,
      deviance: fit.deviance,
      parameters: k,
      aicc: room > 0 ? fit.deviance + 2 * k + (2 * k * (k + 1)) / room : null,
      energyJPerMol: Math.exp(fit.lnEnergy),
      bend: fit.q,
    };
  });
}

function lagEvidence(judged: JudgedEvent, a: BendAnalysis, { verdict }: Decision): LagEvidence[] {
  const bent = verdict === 'material' || verdict === 'undecided';
  const fit = bent ? a.full : a.laws.L;
  const beyond = bent ? a.lagBeyond.bent : a.lagBeyond.straight;
  return judged.instruments.map((c, j) => {
    const at = fit.layout.lag[j];
    const variance = fit.inverse ? fit.inverse[at * (fit.layout.p + 1)] : Number.NaN;
    return {
      instrument: c.instrument,
      lagS: fit.lagS[j],
      lagErrorS: Math.sqrt(variance) / a.data.topRate[j],
      allowedS: a.data.lagSeS[j],
      beyondCalibration: beyond[j],
    };
  });
}

function secondOpinions(judged: JudgedEvent, { full }: BendAnalysis): EventVerdict['otherOpinions'] {
  return (['peak', 'half'] as const).flatMap((what) => {
    const { data, own } = lawData(judged, what);
    const settled = settleBend(data, own, full);
    return settled ? [{ of: what, ...bendOf(data, settled) }] : [];
  });
}

function residualsByInstrument(judged: JudgedEvent, { fit }: SharedFit): EventVerdict['residuals'] {
  return judged.instruments.map(({ instrument }) => {
    const own = Array.from(fit.residualK).filter((_, i) => judged.scans[i].instrument === instrument);
    return {
      instrument,
      scans: own.length,
      meanK: own.reduce((s, v) => s + v, 0) / own.length,
      rmsK: Math.sqrt(own.reduce((s, v) => s + v * v, 0) / own.length),
    };
  });
}

function judgeFlags(
  where: { sample: string; event: number },
  { verdict }: Decision,
  a: BendAnalysis,
  lags: LagEvidence[],
  opinions: EventVerdict['otherOpinions'],
  judged: JudgedEvent,
): Flag[] {
  const out: Flag[] = [];
  for (const [j, l] of lags.entries()) {
    const place = { ...where, instrument: l.instrument };
    if (l.beyondCalibration && verdict !== 'undecided') {
      out.push(
        flag(
          'lag-beyond-calibration',
          `The temperatures need a lag left over after correction: ${lagInWords(l)}.`,
          'Run a standard on this instrument at several rates, or mend its row in instruments.csv.',
          place,
        ),
      );
    }
    if (l.lagS < -NEGATIVE_ERRORS * Math.hypot(l.lagErrorS, l.allowedS)) {
      out.push(
        flag(
          'lag-negative',
          `The lag left over is negative: ${lagInWords(l)}; ${judged.instruments[j].lagS} s were taken out before.`,
          'The file may have been corrected before it came, or the event warms the sample; state the lag that is left in instruments.csv.',
          place,
        ),
      );
    }
  }
  if (a.stateDiffers) {
    out.push(
      flag(
        'state-differs',
        'With another ln K on each instrument the temperatures fit clearly better: the sample may be in another state there (film, other nuclei, other history).',
        'Run both instruments at a shared rate on material of the same history.',
        where,
      ),
    );
  }
  for (const o of opinions) {
    if (Math.abs(o.bend - a.bend) < OPINIONS_APART * Math.hypot(o.halfWidth99, a.halfWidth99)) continue;
    out.push(
      flag(
        'opinions-differ',
        `The ${o.of === 'peak' ? 'peaks' : 'temperatures at α = 0.5'} give a bend of ${o.bend.toFixed(2)} ± ${o.halfWidth99.toFixed(2)}, the time centroids ${a.bend.toFixed(2)} ± ${a.halfWidth99.toFixed(2)}.`,
        'A response of the signal that was not undone moves them apart; give response times in instruments.csv, and look at the baselines.',
        where,
      ),
    );
  }
  return out;
}

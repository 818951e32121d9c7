import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, test } from 'vitest';
import { fitArrhenius } from '../../jobs/kinetics/avrami/hold-series.ts';
import { fitHold } from '../../jobs/kinetics/avrami/isothermal.ts';
import { fitOzawa } from '../../jobs/kinetics/avrami/ozawa.ts';
import { createEstimator, rampIntegrals } from '../../jobs/kinetics/estimate.ts';
import { CONVERSION_COUNT, type EventColumns, emptyColumns } from '../../jobs/kinetics/event-data.ts';
import { createFurtherEstimator } from '../../jobs/kinetics/further-estimates.ts';
import { fitFriedman } from '../../jobs/kinetics/isoconversional/friedman.ts';
import { COOLING_BRACKET, fitVyazovkin } from '../../jobs/kinetics/isoconversional/vyazovkin.ts';
import { vyazovkinWightLimits } from '../../jobs/kinetics/isoconversional/vyazovkin-wight.ts';
import { fitSestakBerggren } from '../../jobs/kinetics/models/sestak-berggren.ts';
import {
  BOSWELL,
  type EnergyEstimate,
  fitAugisBennett,
  fitEnergyLine,
  fitOzawaFlynnWall,
  KISSINGER,
  kissingerLnPrefactor,
  STARINK,
} from '../../jobs/kinetics/peak-methods.ts';
import { type ArrheniusIntegral, addStretch } from '../../jobs/laws/arrhenius-integral.ts';
import { studentQuantile } from '../../jobs/numeric/distributions.ts';
import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import { validate } from '../validation/validate.ts';

/**
 * The same analyses by SciPy (scipy/analyse.py, written from the formulas with SciPy's tools alone) and by the project, on ten data sets.
 * SciPy's outputs are kept in scipy/results.json with the versions that made them.
 */
const folder = fileURLToPath(new URL('./scipy/', import.meta.url));
type Numbers = { [key: string]: number | number[] | number[][] };

interface Peaks {
  kind: 'peaks';
  name: string;
  ratePerMinute: number[];
  peakK: number[];
  startK?: number[];
  weights?: number[];
}
interface Ramps {
  kind: 'ramps' | 'cooling';
  name: string;
  ratePerMinute: number[];
  startK: number[];
  temperatureK: number[][];
  lnRatePerS: number[][];
  weights?: number[];
  ozawaK: number[];
}
interface Holds {
  kind: 'holds';
  name: string;
  holds: { temperatureK: number; reachedS: number; timeS: number[]; conversion: number[] }[];
}
type DataSet = Peaks | Ramps | Holds;

const { sets } = JSON.parse(readFileSync(`${folder}data-sets.json`, 'utf8')) as { sets: DataSet[] };
interface Kept {
  versions: { python: string; scipy: string; numpy: string };
  results: Record<string, Numbers>;
}
const kept = JSON.parse(readFileSync(`${folder}results.json`, 'utf8')) as Kept;

const perSecond = (perMinute: number[], sign = 1) => Float64Array.from(perMinute, (b) => (sign * b) / 60);
const integrals = (n: number): ArrheniusIntegral[] =>
  Array.from({ length: n }, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));

function analysePeaks(s: Peaks): Numbers {
  const rate = perSecond(s.ratePerMinute);
  const out: Numbers = {};
  const put = (name: string, e: EnergyEstimate) => {
    out[name] = e.energy;
    out[`${name}_error`] = e.energyError;
  };
  const kissinger = fitEnergyLine(rate, s.peakK, KISSINGER.power, KISSINGER.factor, s.weights);
  put('kissinger', kissinger);
  out.kissinger_ln_prefactor = kissingerLnPrefactor(kissinger);
  out.kissinger_lower95 = kissinger.energy - studentQuantile(0.975, s.peakK.length - 2) * kissinger.energyError;
  put('boswell', fitEnergyLine(rate, s.peakK, BOSWELL.power, BOSWELL.factor, s.weights));
  put('starink', fitEnergyLine(rate, s.peakK, STARINK.power, STARINK.factor, s.weights));
  put('ozawa_flynn_wall', fitOzawaFlynnWall(rate, s.peakK, s.weights));
  if (s.startK) put('augis_bennett', fitAugisBennett(rate, s.peakK, s.startK, s.weights));
  return out;
}

function columnsOf(s: Ramps): EventColumns {
  const d = emptyColumns(s.ratePerMinute.length);
  d.rate.set(perSecond(s.ratePerMinute, s.kind === 'cooling' ? -1 : 1));
  d.rampStartK.set(s.startK);
  d.hasCurve.fill(1);
  s.temperatureK.forEach((T, i) => {
    d.temperatureK.set(T, i * CONVERSION_COUNT);
    d.lnRate.set(s.lnRatePerS[i], i * CONVERSION_COUNT);
    // The peak only starts the fits.
    d.peakK[i] = T[12];
    d.widthK[i] = T[16] - T[2];
  });
  return d;
}

function analyseRamps(s: Ramps): Numbers {
  const d = columnsOf(s);
  const curves = Uint16Array.from({ length: d.n }, (_, i) => i);
  const weights = Float64Array.from(s.weights ?? new Array<number>(d.n).fill(1));
  const at = (values: Float64Array, k: number) => Float64Array.from(curves, (i) => values[i * CONVERSION_COUNT + k]);
  const friedman = Array.from({ length: CONVERSION_COUNT }, (_, k) =>
    fitFriedman(at(d.lnRate, k), at(d.temperatureK, k), weights),
  );
  const out: Numbers = {
    friedman: friedman.map((f) => f.energy),
    friedman_error: friedman.map((f) => f.energyError),
  };
  const ozawa = (lnRate: Float64Array) => fitOzawa(d, curves, lnRate, weights, s.ozawaK);
  if (s.ozawaK.length > 0) out.ozawa_exponent = ozawa(d.rate.map((b) => Math.log(Math.abs(b))));
  if (s.kind === 'cooling') {
    const step = (k: number) => (energy: number, o: ArrheniusIntegral[]) => {
      const c = energy / GAS_CONSTANT;
      for (let i = 0; i < d.n; i++) {
        Object.assign(o[i], { value: 0, byEnergy: 0, byEnergy2: 0 });
        const to = d.temperatureK[i * CONVERSION_COUNT + k];
        const from = k === 0 ? d.rampStartK[i] : d.temperatureK[i * CONVERSION_COUNT + k - 1];
        addStretch(from, to, (to - from) / d.rate[i], c, c / 430, o[i]);
      }
    };
    out.vyazovkin = friedman.map(
      (f, k) => fitVyazovkin(step(k), weights, f.energy, integrals(d.n), COOLING_BRACKET).energy,
    );
    return out;
  }
  const programme = rampIntegrals(d, curves);
  const x0 = at(d.temperatureK, 9).reduce((sum, T) => sum + 1 / T / d.n, 0);
  const settings = {
    curves,
    weights,
    curveWeights: weights,
    curveSigmaK: weights.map((w) => 0.3 / Math.sqrt(w)),
    augisBennett: false,
    curveMethods: true,
    x0,
  };
  const e = createEstimator(d, settings, programme)();
  const plan = { ozawaTemperatures: s.ozawaK, sestakBerggren: true };
  const more = createFurtherEstimator(d, settings, plan)(e);
  const law = fitSestakBerggren(d, curves, weights)!;
  Object.assign(out, {
    vyazovkin: Array.from(e.vyazovkin),
    kissinger_akahira_sunose: Array.from(e.kissingerAkahiraSunose),
    starink: Array.from(e.starink),
    ozawa_flynn_wall: Array.from(e.ozawaFlynnWallCurve),
    vyazovkin_linear: Array.from(more.vyazovkinLinear),
    jmak: e.jmak!.energy,
    jmak_ln_prefactor: e.jmak!.lnPrefactor,
    jmak_exponent: e.jmak!.exponent,
    compensation_ln_prefactor: more.friedmanLnPrefactor,
    matusita_sakka_exponent: more.matusitaSakka.exponent,
    matusita_sakka_scaled_energy: more.matusitaSakka.scaledEnergy,
    sestak_berggren: [law.energy, law.lnPrefactor, law.m, law.n],
  });
  if (!s.weights) {
    out.vyazovkin_wight = [
      ...vyazovkinWightLimits((E, o) => programme.step(E, x0, 9, o), e.vyazovkin[9], integrals(d.n))!,
    ];
  }
  return out;
}

function analyseHolds(s: Holds): Numbers {
  const fits = s.holds.map((h) => ({
    temperatureK: h.temperatureK,
    fit: fitHold(Float64Array.from(h.timeS), h.conversion, h.reachedS),
  }));
  const line = fitArrhenius(fits);
  const of = <T>(pick: (f: (typeof fits)[number]['fit']) => T): T[] => fits.map(({ fit }) => pick(fit));
  return {
    ln_rate: of((f) => f.lnRate),
    exponent: of((f) => f.exponent),
    start: of((f) => f.startS),
    covariance: of((f) => [0, 4, 8, 5].map((i) => f.fit.covariance![i])),
    energy: line.energy,
    energy_error: line.energyError,
    ln_prefactor: line.lnPrefactor,
  };
}

const analyse = (s: DataSet): Numbers =>
  s.kind === 'peaks' ? analysePeaks(s) : s.kind === 'holds' ? analyseHolds(s) : analyseRamps(s);

/** Largest relative difference over all the numbers of a result, and where. */
function difference(a: Numbers, b: Numbers): { worst: number; where: string; at: number } {
  let worst = 0;
  let where = '';
  let at = 0;
  for (const key of Object.keys(b)) {
    const [x, y] = [[a[key]].flat(2) as number[], [b[key]].flat(2) as number[]];
    if (x.length !== y.length)
      return { worst: Number.POSITIVE_INFINITY, where: `${key}: ${x.length} against ${y.length}`, at: 0 };
    y.forEach((v, i) => {
      const off = Math.abs(x[i] / v - 1);
      // What differs by rounding alone is not told apart.
      if (!(off <= Math.max(worst, 1e-9))) [worst, where, at] = [off, `${key}[${i}]: ${x[i]} against ${v}`, i];
    });
  }
  return { worst, where, at };
}

/** The method that a key of the results belongs to; those of holds carry none in their name. */
const METHODS = [
  ...['kissinger_akahira_sunose', 'kissinger', 'boswell', 'starink', 'ozawa_flynn_wall', 'augis_bennett', 'friedman'],
  ...['vyazovkin_linear', 'vyazovkin_wight', 'vyazovkin', 'matusita_sakka', 'sestak_berggren', 'ozawa', 'jmak'],
];
const methodOf = (key: string): string =>
  METHODS.find((method) => key.startsWith(method)) ?? (key.startsWith('compensation') ? 'friedman' : 'jmak_isothermal');

describe(`against SciPy ${kept.versions.scipy}, NumPy ${kept.versions.numpy}`, () => {
  test('ten data sets, every one with its results', () => {
    expect(sets).toHaveLength(10);
    expect(Object.keys(kept.results)).toEqual(sets.map((s) => s.name));
  });
  test.each(sets)('$name: every number to 1e-6', (s) => {
    const expected = kept.results[s.name];
    const ours = analyse(s);
    expect(Object.keys(ours).sort()).toEqual(Object.keys(expected).sort());
    for (const key of Object.keys(expected)) {
      const { worst, where, at } = difference({ [key]: ours[key] }, { [key]: expected[key] });
      expect(worst, where).toBeLessThan(1e-6);
      const [got, wanted] = [[ours[key]].flat(2)[at], [expected[key]].flat(2)[at]];
      // The line of the chapter is that of the number that differs most.
      const quantity = `${s.name}, ${key}[${at}]`;
      const within = 1e-6 * Math.abs(wanted);
      validate({ method: methodOf(key), quantity, source: 'scipy', expected: wanted, got, within });
    }
  });
});

const probe = spawnSync('python3', ['-c', 'import scipy, numpy'], { stdio: 'ignore' });
test.skipIf(probe.status !== 0)(
  `the kept results are what the script prints here (skipped where python3 with SciPy is missing)`,
  () => {
    const run = spawnSync('python3', [`${folder}analyse.py`], { encoding: 'utf8', maxBuffer: 1e7 });
    expect(run.stderr).toBe('');
    const { results } = JSON.parse(run.stdout) as Kept;
    for (const s of sets) {
      const { worst, where } = difference(results[s.name], kept.results[s.name]);
      expect(worst, where).toBeLessThan(2e-7);
    }
  },
  60_000,
);

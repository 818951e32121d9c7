import { GAS_CONSTANT } from '../../schema/wire/units.ts';
import {
  type ArrheniusIntegral,
  addArrheniusIntegral,
  addStretch,
  fillRampIntegrals,
  type LnIntegrals,
  setLnIntegral,
} from '../laws/arrhenius-integral.ts';
import { type JmakEstimate, JmakFit } from './avrami/non-isothermal.ts';
import { CONVERSION_COUNT, type EventColumns, type EventData, GRID_INDEX, usableWeights } from './event-data.ts';
import { fitVyazovkin, meanLnIntegral } from './isoconversional/vyazovkin.ts';
import {
  augisBennettExponent,
  BOSWELL,
  energyFromSlopes,
  fitAugisBennett,
  flynnFactor,
  inverseSlopes,
  KISSINGER,
  kissingerLnPrefactor,
  STARINK,
} from './peak-methods.ts';

/** Index of α = 0.5. */
const MIDDLE = 9;

/** Every number of one event, estimate or draw. Energies J/mol, ln A of 1/s; arrays over the 19 conversions. */
export interface Estimates {
  kissinger: number;
  kissingerLnPrefactor: number;
  boswell: number;
  ozawaFlynnWall: number;
  augisBennett: number;
  augisBennettExponent: number;
  friedman: Float64Array;
  kissingerAkahiraSunose: Float64Array;
  starink: Float64Array;
  ozawaFlynnWallCurve: Float64Array;
  vyazovkin: Float64Array;
  vyazovkinConverged: boolean;
  /** ln of the time integral that each step of conversion needs at Vyazovkin's E (see `averageSegments`), mean over the scans */
  lnStep: Float64Array;
  jmak?: JmakEstimate;
}

/**
 * Integrals over the temperature programme. A Monte Carlo draw moves the temperatures of a scan along its ramp, so there T(t) is the ramp
 * itself and each integral has a closed form; the estimate uses the programme as measured (see `measuredIntegrals`).
 */
export interface ProgrammeIntegrals {
  /** over the conversion step that ends at conversion k, for the scan at `row` of the curve scans */
  step(energy: number, x0: number, k: number, out: ArrheniusIntegral[]): void;
  /** logarithm of the integral from the start of the programme to each conversion, scan-major */
  cumulative(energy: number, x0: number, out: LnIntegrals): void;
}

const reset = (o: ArrheniusIntegral): void => {
  o.value = 0;
  o.byEnergy = 0;
  o.byEnergy2 = 0;
};

/** Integrals on the programmes as measured: every row from the start of the programme on. */
export function measuredIntegrals(data: EventData, curves: ArrayLike<number>): ProgrammeIntegrals {
  const programme = (j: number) => {
    const p = data.programmes[curves[j]];
    if (!p) throw new RangeError(`scan ${data.scans[curves[j]].file} has no curve`);
    return p;
  };
  const add = (j: number, fromRow: number, toRow: number, energy: number, x0: number, out: ArrheniusIntegral) => {
    const p = programme(j);
    addArrheniusIntegral(p.timeS, p.temperatureK, fromRow, toRow, energy, x0, out);
  };
  const row = (j: number, k: number) => programme(j).gridFrom + GRID_INDEX[k];
  return {
    step(energy, x0, k, out) {
      for (let j = 0; j < curves.length; j++) {
        reset(out[j]);
        add(j, k === 0 ? 0 : row(j, k - 1), row(j, k), energy, x0, out[j]);
      }
    },
    cumulative(energy, x0, out) {
      const sum = { value: 0, byEnergy: 0, byEnergy2: 0 };
      for (let j = 0; j < curves.length; j++) {
        reset(sum);
        for (let k = 0; k < CONVERSION_COUNT; k++) {
          add(j, k === 0 ? 0 : row(j, k - 1), row(j, k), energy, x0, sum);
          setLnIntegral(sum, x0, out, j * CONVERSION_COUNT + k);
        }
      }
    },
  };
}

/** Integrals on ideal ramps through the columns' temperatures. @param curves indices of the scans that have curves */
export function rampIntegrals(columns: EventColumns, curves: ArrayLike<number>): ProgrammeIntegrals {
  const { temperatureK: T, rate, rampStartK } = columns;
  return {
    step(energy, x0, k, out) {
      const c = energy / GAS_CONSTANT;
      for (let j = 0; j < curves.length; j++) {
        const i = curves[j];
        const at = i * CONVERSION_COUNT + k;
        const from = k === 0 ? Math.min(rampStartK[i], T[at] - 1) : T[at - 1];
        reset(out[j]);
        addStretch(from, T[at], (T[at] - from) / rate[i], c, c * x0, out[j]);
      }
    },
    cumulative(energy, x0, out) {
      for (let j = 0; j < curves.length; j++) {
        const i = curves[j];
        const at = i * CONVERSION_COUNT;
        const start = Math.min(rampStartK[i], T[at] - 1);
        const to = j * CONVERSION_COUNT;
        fillRampIntegrals(start, T, at, CONVERSION_COUNT, rate[i], energy, x0, out, to);
      }
    },
  };
}

/** What the estimates rest on beside the columns, made once an event; a draw may overwrite the weights and the scatter. */
export interface EstimateSettings {
  /** scans with curves */
  curves: Uint16Array;
  /** weights of all scans, and of the curve scans */
  weights: Float64Array;
  curveWeights: Float64Array;
  /** conversions that each scan may be used at, scan-major over all scans; all when missing */
  usable?: Uint8Array;
  /** scatter of each curve scan's temperature, K */
  curveSigmaK: Float64Array;
  /** Augis–Bennett's energy applies */
  augisBennett: boolean;
  /** curve methods apply (three distinct rates among the curve scans) */
  curveMethods: boolean;
  /** 1/K, reference inverse temperature of JMAK */
  x0: number;
}

/**
 * Makes the function that computes all peak, isoconversional and JMAK estimates from the columns as they stand when it is called: buffers
 * are made once and the columns and weights may be overwritten between calls (Monte Carlo). Each call overwrites what the one before
 * returned.
 * The function's argument: neighbouring estimates to start from; without them JMAK is fitted from a rough start.
 */
export function createEstimator(
  d: EventColumns,
  s: EstimateSettings,
  integrals: ProgrammeIntegrals,
): (warm?: Estimates) => Estimates {
  const m = s.curves.length;
  const T = new Float64Array(m);
  const lnReaction = new Float64Array(m);
  const lnRate = Float64Array.from(s.curves, (i) => Math.log(d.rate[i]));
  const peakLnRate = d.rate.map(Math.log);
  const { at: used, whole } = usableWeights(d, s.curves, s.curveWeights, s.usable);
  const segmentWeights = whole.slice();
  const weights = new Float64Array(m);
  const work: ArrheniusIntegral[] = Array.from({ length: m }, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
  const jmak = new JmakFit(
    s.curveSigmaK,
    s.x0,
    d.temperatureK,
    s.curves,
    (e, out) => integrals.cumulative(e, s.x0, out),
    s.usable,
  );
  const column = () => new Float64Array(CONVERSION_COUNT);
  const out: Estimates = {
    kissinger: Number.NaN,
    kissingerLnPrefactor: Number.NaN,
    boswell: Number.NaN,
    ozawaFlynnWall: Number.NaN,
    augisBennett: Number.NaN,
    augisBennettExponent: Number.NaN,
    friedman: column(),
    kissingerAkahiraSunose: column(),
    starink: column(),
    ozawaFlynnWallCurve: column(),
    vyazovkin: column(),
    vyazovkinConverged: true,
    lnStep: column(),
  };

  return (warm) => {
    Object.assign(out, peakEstimates(d, s, peakLnRate));
    out.vyazovkinConverged = true;
    if (!s.curveMethods) return out;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      for (let j = 0; j < m; j++) {
        const at = s.curves[j] * CONVERSION_COUNT + k;
        T[j] = d.temperatureK[at];
        lnReaction[j] = d.lnRate[at];
        weights[j] = used[k][j] > 0 ? s.curveWeights[j] : 0;
      }
      const slopes = inverseSlopes(lnRate, T, weights, lnReaction);
      const kas = energyFromSlopes(slopes, KISSINGER.power, KISSINGER.factor);
      const uncorrected = energyFromSlopes(slopes, 0, 1);
      out.kissingerAkahiraSunose[k] = kas;
      out.friedman[k] = -GAS_CONSTANT * slopes.lnReaction;
      out.starink[k] = energyFromSlopes(slopes, STARINK.power, STARINK.factor);
      out.ozawaFlynnWallCurve[k] = uncorrected / flynnFactor(uncorrected, slopes.inverse);
      // In a draw the two energies move together: their ratio in the estimate is the better start.
      const start = warm ? (kas * warm.vyazovkin[k]) / warm.kissingerAkahiraSunose[k] : kas;
      const v = fitVyazovkin((e, o) => integrals.step(e, slopes.inverse, k, o), weights, start, work);
      out.vyazovkin[k] = v.energy;
      out.vyazovkinConverged &&= v.converged;
      out.lnStep[k] =
        meanLnIntegral(v, segmentWeights, work) + (v.energy * s.x0 - v.madeAt * slopes.inverse) / GAS_CONSTANT;
    }
    // ln K at x0 from Kissinger's peak condition ln β = ln K + ln(R T²/E), n from the width.
    out.jmak = warm?.jmak
      ? jmak.fitFrom(warm.jmak.fit.parameters, out.vyazovkin[MIDDLE] / warm.vyazovkin[MIDDLE])
      : jmak.fitFromScratch(
          Float64Array.of(
            out.kissinger,
            out.kissingerLnPrefactor - (out.kissinger * s.x0) / GAS_CONSTANT,
            Math.min(6, Math.max(0.5, out.augisBennettExponent)),
          ),
        );
    return out;
  };
}

type PeakEstimates = Pick<
  Estimates,
  'kissinger' | 'kissingerLnPrefactor' | 'boswell' | 'ozawaFlynnWall' | 'augisBennett' | 'augisBennettExponent'
>;

function peakEstimates(d: EventColumns, s: EstimateSettings, lnRate: Float64Array): PeakEstimates {
  const slopes = inverseSlopes(lnRate, d.peakK, s.weights);
  const kissinger = energyFromSlopes(slopes, KISSINGER.power, KISSINGER.factor);
  const uncorrected = energyFromSlopes(slopes, 0, 1);
  const intercept = slopes.meanLnRate - 2 * slopes.meanLnTemperature + (kissinger / GAS_CONSTANT) * slopes.inverse;
  return {
    kissinger,
    kissingerLnPrefactor: kissingerLnPrefactor({ energy: kissinger, intercept }),
    boswell: energyFromSlopes(slopes, BOSWELL.power, BOSWELL.factor),
    ozawaFlynnWall: uncorrected / flynnFactor(uncorrected, slopes.inverse),
    augisBennett: s.augisBennett ? fitAugisBennett(d.rate, d.peakK, d.rampStartK, s.weights).energy : Number.NaN,
    augisBennettExponent: augisBennettExponent(d.peakK, d.widthK, kissinger, s.weights),
  };
}

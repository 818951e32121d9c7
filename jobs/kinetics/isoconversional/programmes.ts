import { GAS_CONSTANT } from '../../../schema/wire/units.ts';
import { type ArrheniusIntegral, addStretch } from '../../laws/arrhenius-integral.ts';
import type { Random } from '../../numeric/random.ts';
import {
  CONVERSION_COUNT,
  distinctProgrammes,
  type EventData,
  GRID_INDEX,
  type UsableWeights,
  usableWeights,
} from '../event-data.ts';
import { drawCalibration } from '../monte-carlo.ts';
import { fitFriedman } from './friedman.ts';
import { type EnergyBracket, fitVyazovkin } from './vyazovkin.ts';

/** E(α) of any mix of programmes, J/mol, over the 19 conversions. */
export interface ProgrammeEstimates {
  friedman: Float64Array;
  vyazovkin: Float64Array;
  converged: boolean;
}

export interface ProgrammeFit {
  estimate: ProgrammeEstimates;
  drawn: ProgrammeEstimates[];
  /** Of each method, scans that count at each conversion, and whether their programmes are enough for a number there */
  counts: Record<'friedman' | 'vyazovkin', { scans: number[]; determined: boolean[] }>;
}

/** Weights at each conversion: of the scans' rates there, and of their times for the step up to it. */
interface ProgrammeWeights {
  point: UsableWeights;
  step: UsableWeights;
}

/** What a scan leaves over at each conversion, scan-major, and its leverage there. */
interface Leftovers {
  lnReaction: Float64Array;
  lnTime: Float64Array;
  leverage: Float64Array;
}

/** An instrument's own scatter is shrunk towards that of all by this many scans' worth. */
const SHRINK_SCANS = 1;
const ROUNDS = 3;

/**
 * Friedman and incremental Vyazovkin over scans of any programme, ramps up or down and holds together: both need only T(t) as
 * measured. Monte Carlo: the residual of a scan is a whole curve of ln(dα/dt) and of ln(step time) about the common law,
 * whatever its programme, so that no trend with heating rate is needed; offset and lag of an instrument move all its scans together.
 * A scan counts for nothing at conversions where it is not usable, and its step for nothing where either end is not; its residual there is that
 * of its nearest usable conversion.
 * @param data scans with curves only, each usable somewhere
 */
export function fitProgrammes(
  data: EventData,
  bracket: EnergyBracket | undefined,
  random: Random,
  draws: number,
): ProgrammeFit {
  const n = data.n;
  const none = new Float64Array(n * CONVERSION_COUNT);
  const still = new Float64Array(n);
  const every = Uint16Array.from(data.scans.keys());
  const steps = data.usable.map(
    (usable, cell) => usable && (cell % CONVERSION_COUNT === 0 ? 1 : data.usable[cell - 1]),
  );
  const distinct = (scans: number[]) => {
    const { rates, temperatures } = distinctProgrammes(scans.map((i) => data.scans[i]));
    return rates.length + temperatures.length;
  };
  const spread = (weights: Float64Array): ProgrammeWeights => ({
    point: usableWeights(data, every, weights, data.usable, distinct),
    step: usableWeights(data, every, weights, steps, distinct),
  });
  let weights = spread(new Float64Array(n).fill(1));
  const fitter = createProgrammeFitter(data, steps, bracket);
  let sigma: Float64Array = new Float64Array(data.instruments.length).fill(1);
  let estimate = fitter.fit(weights, still, none, none);
  let left = fitter.leftovers(estimate, weights);
  for (let round = 0; round < ROUNDS && data.instruments.length > 1; round++) {
    sigma = instrumentScatter(data, left);
    weights = spread(Float64Array.from(data.instrument, (at) => 1 / sigma[at] ** 2));
    estimate = fitter.fit(weights, still, none, none);
    left = fitter.leftovers(estimate, weights);
  }
  const drawn: ProgrammeEstimates[] = [];
  const shiftK = new Float64Array(n);
  const lnReaction = new Float64Array(none.length);
  const lnTime = new Float64Array(none.length);
  for (let d = 0; d < draws; d++) {
    const calibration = data.instruments.map((c) => drawCalibration(c, random));
    for (let i = 0; i < n; i++) {
      const at = data.instrument[i];
      const from = random.integer(n);
      const scale = sigma[at] / sigma[data.instrument[from]];
      shiftK[i] = -calibration[at].offset - calibration[at].lag * data.rate[i];
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const [own, other] = [i * CONVERSION_COUNT + k, from * CONVERSION_COUNT + k];
        const lift = scale / Math.sqrt(1 - left.leverage[other]);
        lnReaction[own] = lift * left.lnReaction[other] - left.lnReaction[own];
        lnTime[own] = lift * left.lnTime[other] - left.lnTime[own];
      }
    }
    drawn.push(fitter.fit(weights, shiftK, lnReaction, lnTime, estimate));
  }
  const countsOf = ({ at, determined }: UsableWeights) => ({
    scans: at.map((w) => w.filter((v) => v > 0).length),
    determined,
  });
  return { estimate, drawn, counts: { friedman: countsOf(weights.point), vyazovkin: countsOf(weights.step) } };
}

/** Fits on the measured programmes moved by `shiftK` a scan, ln(dα/dt) and ln(step time) changed by what is given. */
function createProgrammeFitter(data: EventData, steps: Uint8Array, bracket: EnergyBracket | undefined) {
  const n = data.n;
  const work: ArrheniusIntegral[] = Array.from({ length: n }, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
  const T = new Float64Array(n);
  const y = new Float64Array(n);
  const programmes = data.programmes.map((p, i) => {
    if (!p) throw new RangeError(`scan ${data.scans[i].file} has no curve`);
    return p;
  });
  const integrals = (
    k: number,
    energy: number,
    x0: number,
    shiftK: Float64Array,
    lnTime: Float64Array,
    out: ArrheniusIntegral[],
  ) => {
    const c = energy / GAS_CONSTANT;
    for (let i = 0; i < n; i++) {
      const p = programmes[i];
      const o = out[i];
      o.value = o.byEnergy = o.byEnergy2 = 0;
      const from = k === 0 ? 0 : p.gridFrom + GRID_INDEX[k - 1];
      const s = shiftK[i];
      for (let r = from; r < p.gridFrom + GRID_INDEX[k]; r++) {
        addStretch(p.temperatureK[r] + s, p.temperatureK[r + 1] + s, p.timeS[r + 1] - p.timeS[r], c, c * x0, o);
      }
      const stretch = Math.exp(lnTime[i * CONVERSION_COUNT + k]);
      o.value *= stretch;
      o.byEnergy *= stretch;
      o.byEnergy2 *= stretch;
    }
  };
  const middle = (k: number) => {
    let sum = 0;
    for (let i = 0; i < n; i++) sum += 1 / data.temperatureK[i * CONVERSION_COUNT + k] / n;
    return sum;
  };
  return {
    fit(
      { point, step }: ProgrammeWeights,
      shiftK: Float64Array,
      lnReaction: Float64Array,
      lnTime: Float64Array,
      warm?: ProgrammeEstimates,
    ): ProgrammeEstimates {
      const out = {
        friedman: new Float64Array(CONVERSION_COUNT),
        vyazovkin: new Float64Array(CONVERSION_COUNT),
        converged: true,
      };
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        for (let i = 0; i < n; i++) {
          const at = i * CONVERSION_COUNT + k;
          T[i] = data.temperatureK[at] + shiftK[i];
          y[i] = data.lnRate[at] + lnReaction[at];
        }
        const x0 = middle(k);
        out.friedman[k] = fitFriedman(y, T, point.at[k]).energy;
        const start = warm ? warm.vyazovkin[k] : out.friedman[k];
        const v = fitVyazovkin((E, o) => integrals(k, E, x0, shiftK, lnTime, o), step.at[k], start, work, bracket);
        out.vyazovkin[k] = v.energy;
        out.converged &&= v.converged || !step.determined[k];
      }
      return out;
    },
    leftovers(e: ProgrammeEstimates, { point, step }: ProgrammeWeights): Leftovers {
      const size = n * CONVERSION_COUNT;
      const left = {
        lnReaction: new Float64Array(size),
        lnTime: new Float64Array(size),
        leverage: new Float64Array(size),
      };
      const zero = new Float64Array(size);
      for (let k = 0; k < CONVERSION_COUNT; k++) {
        const w = point.at[k];
        const sw = w.reduce((s, v) => s + v, 0);
        const wJ = step.at[k];
        const swJ = wJ.reduce((s, v) => s + v, 0);
        for (let i = 0; i < n; i++) {
          T[i] = data.temperatureK[i * CONVERSION_COUNT + k];
          y[i] = data.lnRate[i * CONVERSION_COUNT + k];
        }
        const { residuals } = fitFriedman(y, T, w);
        integrals(k, e.vyazovkin[k], middle(k), new Float64Array(n), zero, work);
        let mx = 0;
        let mJ = 0;
        for (let i = 0; i < n; i++) {
          mx += w[i] / T[i] / sw;
          mJ += (wJ[i] * Math.log(work[i].value)) / swJ;
        }
        let xx = 0;
        for (let i = 0; i < n; i++) xx += w[i] * (1 / T[i] - mx) ** 2;
        for (let i = 0; i < n; i++) {
          const at = i * CONVERSION_COUNT + k;
          left.lnReaction[at] = residuals[i];
          left.lnTime[at] = Math.log(work[i].value) - mJ;
          left.leverage[at] = Math.min(0.99, w[i] / sw + (w[i] * (1 / T[i] - mx) ** 2) / xx);
        }
      }
      fillUnusable(left.lnReaction, data.usable, point.determined);
      fillUnusable(left.leverage, data.usable, point.determined);
      fillUnusable(left.lnTime, steps, step.determined);
      return left;
    },
  };
}

/** What stands for a scan's scatter where it does not count: that of its nearest conversion where it does. */
function fillUnusable(column: Float64Array, usable: Uint8Array, determined: readonly boolean[]): void {
  const counts = usable.map((u, cell) => (determined[cell % CONVERSION_COUNT] ? u : 0));
  for (let first = 0; first < column.length; first += CONVERSION_COUNT) {
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      if (counts[first + k]) continue;
      for (let away = 1; away < CONVERSION_COUNT; away++) {
        const near = k >= away && counts[first + k - away] ? k - away : k + away;
        if (near >= CONVERSION_COUNT || !counts[first + near]) continue;
        column[first + k] = column[first + near];
        break;
      }
    }
  }
}

/** Root mean square of ln(step time) residual/√(1 − h) per instrument, shrunk towards that of all. */
function instrumentScatter(data: EventData, left: Leftovers): Float64Array {
  const sums = new Float64Array(data.instruments.length);
  const scans = new Float64Array(data.instruments.length);
  for (let i = 0; i < data.n; i++) {
    const at = data.instrument[i];
    scans[at]++;
    for (let k = 0; k < CONVERSION_COUNT; k++) {
      const cell = i * CONVERSION_COUNT + k;
      sums[at] += left.lnTime[cell] ** 2 / (1 - left.leverage[cell]) / CONVERSION_COUNT;
    }
  }
  const pooled = sums.reduce((s, v) => s + v, 0) / data.n;
  return sums.map((s, at) => Math.max(1e-9, Math.sqrt((s + SHRINK_SCANS * pooled) / (scans[at] + SHRINK_SCANS))));
}

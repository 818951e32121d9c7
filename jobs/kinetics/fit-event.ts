import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { FitReport, FitScan, ParameterRow } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Random } from '../numeric/random.ts';
import { mean } from '../numeric/statistics.ts';
import {
  createEstimator,
  type EstimateSettings,
  type Estimates,
  measuredIntegrals,
  rampIntegrals,
} from './estimate.ts';
import { CONVERSIONS, collectEvent, distinctRates } from './event-data.ts';
import { findOutliers, judgeEnergy, judgeJmak } from './judge-event.ts';
import { drawBuffer, drawColumns, modelScatter, type ScatterModel } from './monte-carlo.ts';
import { RowBuilder } from './parameter-rows.ts';
import { LATEST_START } from './peak-methods.ts';

export interface EventFit {
  parameters: ParameterRow[];
  reports: FitReport[];
  flags: Flag[];
}

/** Fewer distinct rates than this and no method applies (ICTAC 2011: at least three programmes). */
export const LEAST_RATES = 3;

/** All estimates of one event with their intervals. The caller has made sure of three distinct rates. */
export function fitEvent(
  sample: string,
  event: number,
  scans: FitScan[],
  calibrations: InstrumentCalibration[],
  random: Random,
  draws: number,
): EventFit {
  const data = collectEvent(event, scans, calibrations);
  const where = { sample, event };
  const flags: Flag[] = [];
  const curves = Uint16Array.from(Array.from(data.hasCurve.keys()).filter((i) => data.hasCurve[i] === 1));
  const curveRates = distinctRates(Array.from(curves, (i) => data.rate[i]));
  const curveMethods = curveRates.length >= LEAST_RATES;
  const model = modelScatter(data, curves, distinctRates(data.rate).length);
  const late = data.scans.findIndex((_, i) => data.rampStartK[i] > LATEST_START * data.peakK[i]);
  const settings: EstimateSettings = {
    curves,
    weights: model.weights,
    curveWeights: Float64Array.from(curves, (i) => model.weights[i]),
    augisBennett: late < 0,
    curveMethods,
    x0: mean(Array.from(curves.length ? curves : data.scans.keys(), (i) => 1 / data.peakK[i])),
  };
  if (late >= 0) {
    flags.push(
      flag(
        'start-too-near',
        `The ramp of ${data.scans[late].file} starts at ${data.rampStartK[late].toFixed(0)} K, above ${LATEST_START} of the peak at ${data.peakK[late].toFixed(0)} K; Augis–Bennett’s energy was not computed.`,
        'Start the ramp lower if this method is wanted; the other methods do not need it.',
        where,
      ),
    );
  }
  if (!curveMethods) {
    flags.push(
      flag(
        'few-rates',
        `Only ${curveRates.length} distinct rates have usable conversion curves (3 are needed, 5 recommended); peak methods alone were run.`,
        'Add scans with more points over the event, or scan further beyond it.',
        where,
      ),
    );
  }

  const estimate = createEstimator(data, settings, measuredIntegrals(data, curves))();
  const drawn = runDraws(model, settings, estimate, random, draws);
  flags.push(...findOutliers(model, where));
  const builder = new RowBuilder(sample, data, curves, model, drawn);
  builder.peakRows(estimate, settings);
  if (curveMethods) {
    const varies = judgeEnergy(estimate, drawn, model, where);
    if (varies) flags.push(varies);
    builder.curveRows(estimate, varies ? ['energy-varies'] : []);
    flags.push(...judgeJmak(estimate, where));
  }
  builder.enthalpyRow();
  return { parameters: builder.rows, reports: reportFits(event, estimate, curves.length), flags };
}

function runDraws(
  model: ScatterModel,
  settings: EstimateSettings,
  estimate: Estimates,
  random: Random,
  draws: number,
): Estimates[] {
  const columns = drawBuffer(model.data);
  const estimator = createEstimator(columns, settings, rampIntegrals(columns, settings.curves));
  const out: Estimates[] = [];
  for (let d = 0; d < draws; d++) {
    drawColumns(model, random, columns);
    out.push(estimator(estimate));
  }
  return out;
}

function reportFits(event: number, e: Estimates, curveScans: number): FitReport[] {
  const out: FitReport[] = [];
  if (e.jmak) {
    const { fit, residualRms } = e.jmak;
    out.push({
      event,
      method: 'jmak',
      converged: fit.converged,
      message: fit.message,
      evaluations: fit.evaluations,
      residualRms,
      rows: curveScans * CONVERSIONS.length,
    });
  }
  return out;
}

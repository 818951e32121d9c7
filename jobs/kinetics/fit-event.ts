import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { FitReport, FitScan, ModelFreeFit, ParameterRow } from '../../schema/wire/parameters.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import type { Random } from '../numeric/random.ts';
import { mean } from '../numeric/statistics.ts';
import { ozawaTemperatures } from './avrami/ozawa.ts';
import type { DrawCauses } from './draw-spread.ts';
import { DrawnColumns } from './drawn-columns.ts';
import {
  createEstimator,
  type EstimateSettings,
  type Estimates,
  measuredIntegrals,
  rampIntegrals,
} from './estimate.ts';
import {
  CONVERSION_COUNT,
  CONVERSIONS,
  collectEvent,
  distinctRates,
  type EventData,
  LEAST_RATES,
  pooledMean,
  usableWeights,
} from './event-data.ts';
import { createFurtherEstimator, type FurtherEstimates, type FurtherPlan } from './further-estimates.ts';
import { addAnalyticRows, addFurtherRows } from './further-rows.ts';
import { findOutliers, JMAK_RESIDUAL, judgeEnergy, judgeJmak } from './judge-event.ts';
import { judgeTops, noteExponent, plotModels, reportFurther, reportModels } from './judge-model.ts';
import { describeModelFree } from './model-free.ts';
import { drawBuffer, drawColumns, drawWeights, modelScatter, type ScatterModel } from './monte-carlo.ts';
import { RowBuilder } from './parameter-rows.ts';
import { LATEST_START } from './peak-methods.ts';
import {
  findNonMonotonicSeries,
  findOnsetsAbovePeak,
  findRateIndependence,
  findUndeterminedEnergy,
} from './series-checks.ts';
import { assumeFullResponse, unknownResponses, variantRows } from './variants.ts';

export interface EventFit {
  parameters: ParameterRow[];
  reports: FitReport[];
  flags: Flag[];
  /** What forecasts need of ramps with curves */
  modelFree?: ModelFreeFit;
}

/**
 * All estimates of one event with their intervals, and beside them what they would be without its outliers and, where it is not known how
 * much of a lag smears, with all of it smearing (variants). The caller has made sure of three distinct rates.
 * @param makeRandom a fresh generator for each fit
 */
export function fitEvent(
  sample: string,
  event: number,
  scans: FitScan[],
  calibrations: InstrumentCalibration[],
  makeRandom: () => Random,
  draws: number,
): EventFit {
  const fit = fitScans(sample, event, scans, calibrations, makeRandom(), draws);
  const parameters = [...fit.parameters];
  const again = (part: FitScan[], variant: ParameterRow['variant']) => {
    if (distinctRates(part.map((s) => s.event.rateKPerS)).length < LEAST_RATES) return;
    const other = fitScans(sample, event, part, calibrations, makeRandom(), draws);
    parameters.push(...variantRows(other.parameters, variant));
  };
  const outliers = fit.flags.filter((f) => f.code === 'outlier').map((f) => f.file);
  if (outliers.length > 0)
    again(
      scans.filter((s) => !outliers.includes(s.file)),
      'without_outliers',
    );
  const smearing = unknownResponses(scans, calibrations);
  if (smearing.length > 0) again(assumeFullResponse(scans, calibrations, smearing), 'full_response');
  return { ...fit, parameters };
}

/** One fit of the scans given. */
function fitScans(
  sample: string,
  event: number,
  scans: FitScan[],
  calibrations: InstrumentCalibration[],
  random: Random,
  draws: number,
): EventFit {
  const data = collectEvent(event, scans, calibrations);
  const where = { sample, event };
  const independent = findRateIndependence(data, where);
  if (independent) {
    const report = notComputed(event, 'kissinger', 'the temperature does not rise with heating rate', data.n);
    return { parameters: [], reports: [report], flags: [independent] };
  }
  const flags: Flag[] = [...findOnsetsAbovePeak(data, where), ...findNonMonotonicSeries(data, where)];
  const curves = Uint16Array.from(Array.from(data.hasCurve.keys()).filter((i) => data.hasCurve[i] === 1));
  const curveRates = distinctRates(Array.from(curves, (i) => data.rate[i]));
  const curveMethods = curveRates.length >= LEAST_RATES;
  const model = modelScatter(data, curves, distinctRates(data.rate).length);
  const late = data.scans.findIndex((_, i) => data.rampStartK[i] > LATEST_START * data.peakK[i]);
  const settings: EstimateSettings = {
    curves,
    weights: model.weights,
    curveWeights: Float64Array.from(curves, (i) => model.weights[i]),
    // Left out where all is usable: the inner loops need not ask then.
    usable: Array.from(curves).some((i) => !wholeCurve(data, i)) ? data.usable : undefined,
    curveSigmaK: Float64Array.from(curves, (i) => model.sigmaK[data.instrument[i]]),
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

  const { determined, whole } = usableWeights(data, curves, settings.curveWeights, settings.usable);
  const measured = measuredIntegrals(data, curves);
  const estimate = createEstimator(data, settings, measured)();
  const plots = curveMethods ? plotModels(data, curves, pooledMean(estimate.vyazovkin, determined)) : [];
  const avrami = curveMethods ? judgeJmak(estimate, where) : [];
  const tops = curveMethods && judgeTops(data, curves, plots, where);
  if (tops && !avrami.some((f) => f.code === 'not-avrami')) avrami.push(tops);
  // Scans out of place, as a bent law leaves them, say nothing against the shape.
  const misshapen = Boolean(tops) || (estimate.jmak?.quality?.residualRms ?? 0) > JMAK_RESIDUAL;
  const plan: FurtherPlan = {
    ozawaTemperatures: curveMethods ? ozawaTemperatures(data, curves) : [],
    sestakBerggren: misshapen,
  };
  const more = curveMethods ? createFurtherEstimator(data, settings, plan)(estimate) : undefined;
  const { drawn, causes } = runDraws(model, settings, plan, { main: estimate, further: more }, random, draws);
  flags.push(...findOutliers(model, where));
  const builder = new RowBuilder(sample, data, curves, model, drawn, causes);
  const reports = reportFits(event, estimate, curves.length);
  if (late >= 0) reports.push(notComputed(event, 'augis_bennett', 'a ramp starts too near its peak', data.n));
  builder.peakRows(estimate, settings);
  const undetermined = findUndeterminedEnergy(builder.rows, where);
  if (undetermined) flags.push(undetermined);
  if (more) {
    const varies = judgeEnergy(estimate, drawn, model, determined, where);
    if (varies) flags.push(varies);
    builder.curveRows(estimate, varies ? ['energy-varies'] : [], determined);
    addAnalyticRows(builder, data, settings, estimate);
    addFurtherRows(builder, more, drawn, determined);
    const told = reportFurther(event, more, plan, curves.length * CONVERSIONS.length, where);
    reports.push(...told.reports, ...reportModels(event, plots));
    flags.push(...avrami, ...told.flags);
    const n = builder.rows.find((r) => r.quantity === 'avrami_exponent' && r.method === 'jmak');
    if (!misshapen) flags.push(...noteExponent(n, where));
  }
  builder.enthalpyRow();
  const modelFree: ModelFreeFit | undefined = curveMethods
    ? {
        event,
        curve: describeModelFree(data, curves, whole, measured, estimate.vyazovkin, settings.x0),
        draws: { energyJPerMol: drawn.byDraw(drawn.curve.vyazovkin), lnStep: drawn.byDraw(drawn.curve.lnStep) },
        degreesOfFreedom: Math.max(1, data.n - model.trendParameters),
        lowestK: Math.min(...data.peakK),
        highestK: Math.max(...data.peakK),
      }
    : undefined;
  return { parameters: builder.rows, reports, flags, ...(modelFree && { modelFree }) };
}

function runDraws(
  model: ScatterModel,
  settings: EstimateSettings,
  plan: FurtherPlan,
  estimate: { main: Estimates; further: FurtherEstimates | undefined },
  random: Random,
  draws: number,
): { drawn: DrawnColumns; causes: DrawCauses[] } {
  const columns = drawBuffer(model.data);
  const drawnSettings = {
    ...settings,
    weights: settings.weights.slice(),
    curveWeights: settings.curveWeights.slice(),
    curveSigmaK: settings.curveSigmaK.slice(),
  };
  const estimator = createEstimator(columns, drawnSettings, rampIntegrals(columns, settings.curves));
  const furtherEstimator = createFurtherEstimator(columns, drawnSettings, plan);
  const drawn = new DrawnColumns(draws);
  const neighbour = estimate.further && { main: estimate.main, further: estimate.further };
  const causes: DrawCauses[] = [];
  for (let d = 0; d < draws; d++) {
    causes.push(drawColumns(model, random, columns));
    drawWeights(model, random, drawnSettings);
    const main = estimator(estimate.main);
    drawn.keep(d, main, neighbour && furtherEstimator(main, neighbour));
  }
  return { drawn, causes };
}

const wholeCurve = (data: EventData, i: number): boolean =>
  data.usable.subarray(i * CONVERSION_COUNT, (i + 1) * CONVERSION_COUNT).every((u) => u === 1);

const notComputed = (event: number, method: string, message: string, rows: number): FitReport => ({
  event,
  method,
  converged: false,
  message,
  evaluations: 0,
  residualRms: null,
  rows,
});

function reportFits(event: number, e: Estimates, curveScans: number): FitReport[] {
  const out: FitReport[] = [];
  if (e.jmak) {
    const { fit, quality } = e.jmak;
    out.push({
      event,
      method: 'jmak',
      converged: fit.converged,
      message: fit.message,
      evaluations: fit.evaluations,
      residualRms: quality?.residualRms ?? null,
      rows: curveScans * CONVERSIONS.length,
    });
  }
  return out;
}

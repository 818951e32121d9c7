import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { ArrheniusIntegral } from '../laws/arrhenius-integral.ts';
import { mean } from '../numeric/statistics.ts';
import { studentFactor } from './draw-spread.ts';
import type { DrawnColumns } from './drawn-columns.ts';
import { type EstimateSettings, type Estimates, measuredIntegrals } from './estimate.ts';
import { CONVERSION_COUNT, CONVERSIONS, type EventData, pooledMean, usableWeights } from './event-data.ts';
import type { FurtherEstimates } from './further-estimates.ts';
import { fitFriedman } from './isoconversional/friedman.ts';
import { vyazovkinWightLimits } from './isoconversional/vyazovkin-wight.ts';
import type { RowBuilder } from './parameter-rows.ts';
import { type EnergyEstimate, fitEnergyLine, fitOzawaFlynnWall, KISSINGER, STARINK } from './peak-methods.ts';

const ENERGY = { quantity: 'activation_energy', unit: 'kJ/mol' };

/** Rows of the curve methods beside the main ones, with Monte Carlo intervals. */
export function addFurtherRows(
  builder: RowBuilder,
  e: FurtherEstimates,
  drawn: DrawnColumns,
  determined: readonly boolean[],
): void {
  const energy = (method: string, value: number, column: Float64Array, conversion?: number) =>
    builder.add(
      { ...ENERGY, method, ...(conversion !== undefined && { conversion }) },
      value,
      column,
      1e-3,
      true,
      true,
    );
  const add = (quantity: string, method: string, unit: string, value: number, column: Float64Array, log: boolean) =>
    builder.add({ quantity, method, unit }, value, column, 1, log, true);
  const linear = drawn.curve.vyazovkinLinear;
  energy('vyazovkin_linear', pooledMean(e.vyazovkinLinear, determined), drawn.pooled(linear, determined));
  for (const [k, a] of CONVERSIONS.entries())
    if (determined[k]) energy('vyazovkin_linear', e.vyazovkinLinear[k], drawn.atConversion(linear, k), a);
  add('ln_prefactor', 'friedman', 'ln(1/s)', e.friedmanLnPrefactor, drawn.further.friedmanLnPrefactor, false);
  add('avrami_exponent', 'ozawa', '1', e.ozawaExponent, drawn.further.ozawaExponent, true);
  const { exponent, scaledEnergy } = drawn.matusitaSakka;
  energy(
    'matusita_sakka',
    e.matusitaSakka.scaledEnergy / e.matusitaSakka.exponent,
    scaledEnergy.map((v, d) => v / exponent[d]),
  );
  add('avrami_exponent', 'matusita_sakka', '1', e.matusitaSakka.exponent, exponent, true);
  if (!e.sestakBerggren) return;
  const { sestakBerggren: s } = e;
  const columns = drawn.sestakBerggren;
  energy('sestak_berggren', s.energy, columns.energy);
  add('ln_prefactor', 'sestak_berggren', 'ln(1/s)', s.lnPrefactor, columns.lnPrefactor, false);
  add('model_exponent_m', 'sestak_berggren', '1', s.m, columns.m, false);
  add('model_exponent_n', 'sestak_berggren', '1', s.n, columns.n, false);
}

/** Analytic intervals beside the Monte Carlo ones: Student's t of each isoconversional line, and Vyazovkin & Wight's. */
export function addAnalyticRows(builder: RowBuilder, data: EventData, s: EstimateSettings, e: Estimates): void {
  const { at, determined } = usableWeights(data, s.curves, s.curveWeights, s.usable);
  CONVERSIONS.forEach((conversion, k) => {
    if (!determined[k]) return;
    const scans = s.curves.filter((_, j) => at[k][j] > 0);
    const weights = at[k].filter((w) => w > 0);
    const m = scans.length;
    const t = m > 2 ? studentFactor(m - 2) : Number.NaN;
    const rate = Float64Array.from(scans, (i) => data.rate[i]);
    const T = Float64Array.from(scans, (i) => data.temperatureK[i * CONVERSION_COUNT + k]);
    const lnReaction = Float64Array.from(scans, (i) => data.lnRate[i * CONVERSION_COUNT + k]);
    const work: ArrheniusIntegral[] = Array.from(scans, () => ({ value: 0, byEnergy: 0, byEnergy2: 0 }));
    const measured = measuredIntegrals(data, scans);
    const push = (method: string, value: number, limits: [number, number], kind: ParameterRow['interval']) =>
      builder.push({ ...ENERGY, method, conversion }, value * 1e-3, limits, kind, true);
    const line = (method: string, { energy, energyError }: EnergyEstimate) => {
      const half = t * energyError;
      push(method, energy, [(energy - half) * 1e-3, (energy + half) * 1e-3], 'student_t');
    };
    if (m > 2) {
      line('friedman', fitFriedman(lnReaction, T, weights));
      const { power, factor } = KISSINGER;
      line('kissinger_akahira_sunose', fitEnergyLine(rate, T, power, factor, weights));
      line('starink', fitEnergyLine(rate, T, STARINK.power, STARINK.factor, weights));
      line('ozawa_flynn_wall', fitOzawaFlynnWall(rate, T, weights));
    }
    const inverse = mean(T.map((v) => 1 / v));
    const limits = vyazovkinWightLimits((E, out) => measured.step(E, inverse, k, out), e.vyazovkin[k], work);
    if (limits) push('vyazovkin', e.vyazovkin[k], [limits[0] * 1e-3, limits[1] * 1e-3], 'f_ratio');
  });
}

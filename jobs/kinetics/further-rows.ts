import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { ArrheniusIntegral } from '../laws/arrhenius-integral.ts';
import { mean } from '../numeric/statistics.ts';
import { studentFactor } from './draw-spread.ts';
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
  drawn: FurtherEstimates[],
  determined: readonly boolean[],
): void {
  const add = (
    quantity: string,
    method: string,
    unit: string,
    of: (f: FurtherEstimates) => number,
    log: boolean,
    scale = 1,
    conversion?: number,
  ) =>
    builder.addDrawn(
      { quantity, method, unit, ...(conversion !== undefined && { conversion }) },
      of(e) * scale,
      drawn.map((d) => of(d) * scale),
      log,
      true,
    );
  const energy = (method: string, of: (f: FurtherEstimates) => number, conversion?: number) =>
    add(ENERGY.quantity, method, ENERGY.unit, of, true, 1e-3, conversion);
  energy('vyazovkin_linear', (f) => pooledMean(f.vyazovkinLinear, determined));
  for (const [k, a] of CONVERSIONS.entries())
    if (determined[k]) energy('vyazovkin_linear', (f) => f.vyazovkinLinear[k], a);
  add('ln_prefactor', 'friedman', 'ln(1/s)', (f) => f.friedmanLnPrefactor, false);
  add('avrami_exponent', 'ozawa', '1', (f) => f.ozawaExponent, true);
  energy('matusita_sakka', (f) => f.matusitaSakka.scaledEnergy / f.matusitaSakka.exponent);
  add('avrami_exponent', 'matusita_sakka', '1', (f) => f.matusitaSakka.exponent, true);
  if (!e.sestakBerggren) return;
  const of = (pick: (s: NonNullable<FurtherEstimates['sestakBerggren']>) => number) => (f: FurtherEstimates) =>
    f.sestakBerggren ? pick(f.sestakBerggren) : Number.NaN;
  energy(
    'sestak_berggren',
    of((s) => s.energy),
  );
  add(
    'ln_prefactor',
    'sestak_berggren',
    'ln(1/s)',
    of((s) => s.lnPrefactor),
    false,
  );
  add(
    'model_exponent_m',
    'sestak_berggren',
    '1',
    of((s) => s.m),
    false,
  );
  add(
    'model_exponent_n',
    'sestak_berggren',
    '1',
    of((s) => s.n),
    false,
  );
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

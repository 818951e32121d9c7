import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { FitReport, ParameterRow } from '../../schema/wire/parameters.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { mean } from '../numeric/statistics.ts';
import { readExponent } from './avrami/exponent-reading.ts';
import { CONVERSIONS, type EventData } from './event-data.ts';
import type { FurtherEstimates, FurtherPlan } from './further-estimates.ts';
import { type MasterPlots, masterPlots, rankModels } from './models/master-plots.ts';

/** Where z(α) of a JMAK process may have its top (Málek's test, Málek 1992, Thermochim. Acta 200:257; 1 − 1/e = 0.632 exactly). */
const AVRAMI_TOP = { from: 0.61, to: 0.65 };
/** 33 of the 36 rows between 0.45 and 0.80: the degrees of freedom of the parabola. */
const TOP_DEGREES = 33;
/** A response of this part of the width moves the top by itself. */
const RESPONSE_PART = 0.1;

interface Where {
  sample: string;
  event: number;
}

/** The master plots of the curve scans. @param energy J/mol, an isoconversional mean */
export function plotModels(data: EventData, curves: ArrayLike<number>, energy: number): MasterPlots[] {
  return Array.from(curves).flatMap((i) => masterPlots(data, i, energy) ?? []);
}

/** `not-avrami` where the top of z(α) misses 0.61–0.65 by its 95 % interval in most scans that no response smears. */
export function judgeTops(
  data: EventData,
  curves: ArrayLike<number>,
  plots: readonly MasterPlots[],
  where: Where,
): Flag | undefined {
  const t = studentQuantile(0.975, TOP_DEGREES);
  const fit = Array.from(curves).filter((i) => {
    const c = data.instruments[data.instrument[i]];
    return Math.abs((c.responseS ?? c.lagS) * data.rate[i]) < RESPONSE_PART * data.widthK[i];
  });
  if (plots.length < curves.length || fit.length < curves.length / 2) return undefined;
  const tops = fit.map((i) => plots[Array.from(curves).indexOf(i)]);
  const missed = tops.filter(
    ({ peak, peakError }) => peak - t * peakError > AVRAMI_TOP.to || peak + t * peakError < AVRAMI_TOP.from,
  );
  if (!(missed.length > tops.length / 2)) return undefined;
  return flag(
    'not-avrami',
    `z(α) has its top at α = ${mean(tops.map((p) => p.peak)).toFixed(3)} on average; a JMAK process has it between ${AVRAMI_TOP.from} and ${AVRAMI_TOP.to}, and in ${missed.length} of ${tops.length} scans the 95 % interval misses that.`,
    'Use the isoconversional energies; the Šesták–Berggren law was fitted in the place of JMAK.',
    where,
  );
}

/** Which reaction model comes nearest to y(α), with the runners-up; never more than a hint. */
export function reportModels(event: number, plots: readonly MasterPlots[]): FitReport[] {
  if (plots.length === 0) return [];
  const [first, second, third] = rankModels(plots);
  const top = plots.map((p) => p.peak);
  return [
    {
      event,
      method: 'master_plots',
      converged: true,
      message: `z(α) has its top at ${mean(top).toFixed(3)} (${Math.min(...top).toFixed(3)} to ${Math.max(...top).toFixed(3)}); nearest to y(α): ${first.name} (distance ${first.distance.toFixed(3)}), then ${second.name} (${second.distance.toFixed(3)}), ${third.name} (${third.distance.toFixed(3)})`,
      evaluations: 0,
      residualRms: first.distance,
      rows: plots.length * CONVERSIONS.length,
    },
  ];
}

/** How the further methods ended; one that does not apply says why. */
export function reportFurther(
  event: number,
  e: FurtherEstimates,
  plan: FurtherPlan,
  rows: number,
  where: Where,
): { reports: FitReport[]; flags: Flag[] } {
  const reports: FitReport[] = [];
  const flags: Flag[] = [];
  const report = (method: string, converged: boolean, message: string, residualRms: number | null = null) =>
    reports.push({ event, method, converged, message, evaluations: 0, residualRms, rows });
  if (plan.ozawaTemperatures.length === 0) {
    const reason =
      'no temperature has three distinct rates with 0.05 < α < 0.95 at once (rates within a factor 7.6, 3.9, 2.8 are needed for n = 2, 3, 4)';
    report('ozawa', false, reason);
    flags.push(
      flag(
        'method-not-applicable',
        `Ozawa’s exponent was not computed: ${reason}.`,
        'Add rates between those there if this method is wanted; JMAK’s n does not need it.',
        where,
      ),
    );
  } else {
    const T = plan.ozawaTemperatures;
    report(
      'ozawa',
      true,
      `common slope over ${T.length} temperatures from ${T[0].toFixed(1)} to ${T[T.length - 1].toFixed(1)} K`,
    );
  }
  const { exponent: n, scaledEnergy } = e.matusitaSakka;
  const kJ = (v: number) => (v / 1e3).toFixed(1);
  const formed =
    n > 1.05
      ? `m = n − 1 (nuclei form on heating): ${kJ(scaledEnergy / (n - 1))} kJ/mol`
      : 'm = n − 1 is not possible here';
  report('matusita_sakka', true, `m = n (nuclei there before): ${kJ(scaledEnergy / n)} kJ/mol; ${formed}`);
  if (plan.sestakBerggren) {
    const s = e.sestakBerggren;
    if (s) report('sestak_berggren', true, 'linear fit of ln(dα/dt)', s.residualRms);
    else report('sestak_berggren', false, 'the scans do not determine E, ln A, M and N together');
  }
  return { reports, flags };
}

/** The note that reads an exponent against types of nucleation and growth. @param row n with its interval */
export function noteExponent(row: ParameterRow | undefined, where: Where): Flag[] {
  if (!row) return [];
  const interval =
    row.lower95 !== null && row.upper95 !== null
      ? ` (95 % ${row.lower95.toFixed(2)} to ${row.upper95.toFixed(2)})`
      : '';
  return [
    flag(
      'exponent-reading',
      `n = ${row.value.toFixed(2)}${interval} is what these give: ${readExponent(row.value, row.lower95 ?? undefined, row.upper95 ?? undefined)}`,
      'Take it as a hint (Christian 1975); microscopy of a partly crystallised sample decides.',
      where,
    ),
  ];
}

import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { GlassFacts } from '../../schema/wire/verdicts.ts';
import { studentQuantile } from '../numeric/distributions.ts';
import { mean, standardDeviation } from '../numeric/statistics.ts';
import { fitGordonTaylor, type GordonTaylorFit, glassTransitionOfMixture } from './composition.ts';
import { decouplingError, fitDecoupling, trendDecoupling } from './decoupling.ts';
import { meltingOf } from './driving-force.ts';
import { fitMoynihan, type MoynihanFit } from './fragility.ts';
import { makeParameter, type RowBase } from './rows.ts';
import { stabilityNumbers } from './stability.ts';
import type { JudgedEvent } from './verdict/collect.ts';
import type { SharedFit } from './verdict/shared-law.ts';
import { fitViscosity, LEAST_VISCOSITIES, LOG10_INFINITY, type ViscosityFit, type ViscosityLaw } from './viscosity.ts';

/** What the sample's glass is like, whatever the event: one per sample. */
export interface GlassState {
  moynihan?: MoynihanFit;
  fits: ViscosityFit[];
  /** the law that growth is compared with: MYEGA of the table, else of (Tg, m) */
  viscosity?: ViscosityLaw;
  /** one standard error of m as a part of it, where m comes from Tg(β) */
  fragilityError: number;
  glassTransitionK?: number;
  /** Tg(w) over the sample's series */
  composition?: GordonTaylorFit;
  rows: ParameterRow[];
  flags: Flag[];
}

/** Fragility and viscosity of a sample from its glass transitions, its viscosity table and its sheet. Rows carry event 0: they belong to no event. */
export function readGlass(sample: string, facts: GlassFacts): GlassState {
  const flags: Flag[] = [];
  const rows: ParameterRow[] = [];
  const seen = [...(facts.glassTransitions ?? [])]
    .filter((g) => g.rateKPerS > 0)
    .sort((a, b) => a.rateKPerS - b.rateKPerS);
  let moynihan: MoynihanFit | undefined;
  if (seen.length > 0 && facts.cooledAtHeatingRate) {
    moynihan = fitMoynihan(
      seen.map((g) => g.rateKPerS),
      seen.map((g) => g.temperatureK),
    );
  } else if (new Set(seen.map((g) => g.rateKPerS.toPrecision(2))).size >= 3) {
    flags.push(
      flag(
        'glass-history',
        `${seen.length} scans show a glass transition, but samples.csv does not say that each was cooled through it at its own heating rate; no fragility is read from them.`,
        'Cool each scan at its heating rate and say so in «cooled at heating rate», or give a viscosity table.',
        { sample },
      ),
    );
  }
  const base: RowBase = {
    sample,
    event: 0,
    scan_count: seen.length,
    rate_min_K_per_s: seen[0]?.rateKPerS ?? 0,
    rate_max_K_per_s: seen[seen.length - 1]?.rateKPerS ?? 0,
  };
  if (moynihan) {
    const m = moynihan;
    const student = { interval: 'student_t' as const, temperature_K: m.glassTransitionK };
    const kilo = (v: readonly [number, number]): [number, number] => [v[0] / 1e3, v[1] / 1e3];
    rows.push(
      makeParameter(
        base,
        'glass_transition_energy',
        'moynihan',
        'kJ/mol',
        m.energyJPerMol / 1e3,
        kilo(m.energy95),
        student,
      ),
      makeParameter(base, 'fragility', 'moynihan', '1', m.fragility, m.fragility95, student),
    );
  }
  const table = facts.viscosity ?? [];
  const fits = (['myega', 'vft'] as const).flatMap((kind) => fitViscosity(kind, table) ?? []);
  const myega = fits.find((f) => f.law.kind === 'myega');
  if (myega) {
    const half = myega.fragilityError && studentQuantile(0.975, myega.rows - 3) * myega.fragilityError;
    const m = myega.law.fragility;
    const interval = half ? ([m - half, m + half] as const) : undefined;
    rows.push(
      makeParameter(base, 'fragility', 'viscosity', '1', m, interval, {
        interval: 'student_t',
        temperature_K: myega.law.glassTransitionK,
        scan_count: myega.rows,
        rate_min_K_per_s: 0,
        rate_max_K_per_s: 0,
      }),
    );
  } else if (table.length > 0) {
    flags.push(
      flag(
        'method-not-applicable',
        `The viscosity table has ${table.length} rows; three parameters need at least ${LEAST_VISCOSITIES} rows over two decades.`,
        'Add rows to viscosity.csv.',
        { sample },
      ),
    );
  }
  const composition = readComposition(sample, facts, flags);
  const glassTransitionK =
    moynihan?.glassTransitionK ??
    facts.glassTransitionK ??
    slowest(seen) ??
    myega?.law.glassTransitionK ??
    (composition && glassTransitionOfMixture(composition.law, facts.solventFraction ?? 0));
  const fragility = moynihan?.fragility ?? facts.fragility;
  const spread = moynihan
    ? Math.log(moynihan.fragility95[1] / moynihan.fragility) / studentQuantile(0.975, Math.max(1, moynihan.degrees))
    : 0;
  const viscosity: ViscosityLaw | undefined =
    myega?.law ??
    (fragility !== undefined && glassTransitionK !== undefined
      ? { kind: 'myega', log10Infinity: LOG10_INFINITY, glassTransitionK, fragility }
      : undefined);
  return {
    moynihan,
    fits,
    viscosity,
    fragilityError: spread,
    glassTransitionK,
    composition,
    rows,
    flags,
  };
}

/** Gordon and Taylor's law over the series that the sample belongs to. */
function readComposition(sample: string, facts: GlassFacts, flags: Flag[]): GordonTaylorFit | undefined {
  const { series, solventFraction, compositions = [] } = facts;
  if (series === undefined || solventFraction === undefined) return undefined;
  const found = fitGordonTaylor(compositions);
  if (found?.fit.converged) return found;
  flags.push(
    flag(
      'method-not-applicable',
      `Tg(w) of the series ${series} is not fitted: samples.csv gives the glass transition of ${compositions.length} of its compositions${found ? ', which do not determine it' : ''}; three different ones are needed.`,
      'Add compositions with their glass transition; the pure solvent, at a fraction of 1, is one.',
      { sample },
    ),
  );
  return undefined;
}

/** Tg(w) of the series, and where the measured temperatures lie above that of this composition. */
function compositionSentence(facts: GlassFacts, { law, errors }: GordonTaylorFit, shared: SharedFit): string {
  const w = facts.solventFraction ?? 0;
  const Tg = glassTransitionOfMixture(law, w);
  const { lowestMeasuredK: low, highestMeasuredK: high } = shared.law;
  const part = (value: number, error: number | undefined, digits: number) =>
    `${value.toFixed(digits)}${error === undefined ? '' : ` ± ${error.toFixed(digits)}`}`;
  return `Over the series ${facts.series} Tg(w) follows Gordon and Taylor with ${part(law.solidK, errors?.solidK, 1)} K dry, ${part(law.solventK, errors?.solventK, 1)} K for the solvent and k = ${part(law.k, errors?.k, 2)} (one standard error); at w = ${w} it is ${Tg.toFixed(1)} K, and the event was measured at T − Tg(w) of ${(low - Tg).toFixed(1)} to ${(high - Tg).toFixed(1)} K.`;
}

const slowest = (seen: { temperatureK: number }[]): number | undefined => seen[0]?.temperatureK;

/** ξ, stability numbers and what to say of them, for one event. */
export function glassOfEvent(
  base: RowBase,
  facts: GlassFacts,
  glass: GlassState,
  judged: JudgedEvent,
  shared: SharedFit | undefined,
): { rows: ParameterRow[]; flags: Flag[]; sentences: string[] } {
  const rows: ParameterRow[] = [];
  const flags: Flag[] = [];
  const sentences: string[] = [];
  const { sample, event } = base;
  if (shared && glass.viscosity) {
    const melting = meltingOf(facts);
    const xi = fitDecoupling(shared.law, shared.draws, glass.viscosity, melting);
    if (xi) {
      if (!melting) {
        flags.push(
          flag(
            'driving-force-ignored',
            'The melting temperature, its enthalpy or the molar mass is not in samples.csv; ξ is read with a driving factor of 1.',
            'Give all three; the molar mass is that of the unit that attaches (alloys: mean per atom).',
            { sample, event },
          ),
        );
      }
      const t = studentQuantile(0.975, shared.degrees);
      const table = glass.fits.find((f) => f.law === glass.viscosity);
      const fromViscosity = table ? decouplingError(shared.law, table, melting) / xi.exponent : glass.fragilityError;
      const spread = t * Math.hypot(standardDeviation(xi.drawn.map(Math.log)), fromViscosity);
      const interval = [xi.exponent * Math.exp(-spread), xi.exponent * Math.exp(spread)] as const;
      rows.push(
        makeParameter(base, 'decoupling_exponent', 'shared_law', '1', xi.exponent, interval, {
          flags: melting ? [] : ['driving-force-ignored'],
        }),
      );
      const other = melting && fitDecoupling(shared.law, shared.draws, glass.viscosity, melting, 'thompson_spaepen');
      sentences.push(
        `Growth follows the viscosity to the power −${xi.exponent.toFixed(2)} (${interval[0].toFixed(2)} to ${interval[1].toFixed(2)}) between ${xi.lowK.toFixed(0)} and ${xi.highK.toFixed(0)} K, if nuclei pre-exist; the published trend gives ${trendDecoupling(glass.viscosity.fragility).toFixed(2)} at a fragility of ${glass.viscosity.fragility.toFixed(0)}${other ? `; with the driving force of Thompson and Spaepen it is ${other.exponent.toFixed(2)}` : ''}.`,
      );
    }
  }
  if (shared && glass.composition) sentences.push(compositionSentence(facts, glass.composition, shared));
  rows.push(...stabilityRows(base, facts, glass, judged));
  return { rows, flags, sentences };
}

/** ΔTx, Trg and Hrubý's number from the scans nearest to one rate, preferably 10 K/min; the row's rates say which. */
function stabilityRows(base: RowBase, facts: GlassFacts, glass: GlassState, judged: JudgedEvent): ParameterRow[] {
  const seen = facts.glassTransitions ?? [];
  const far = (rate: number) => Math.abs(Math.log(rate / (10 / 60)));
  const [near] = [...judged.scans].sort((a, b) => far(a.event.rateKPerS) - far(b.event.rateKPerS));
  const same = judged.scans.filter((s) => Math.abs(Math.log(s.event.rateKPerS / near.event.rateKPerS)) < 0.02);
  const own = seen
    .filter((g) => Math.abs(Math.log(g.rateKPerS / near.event.rateKPerS)) < 0.1)
    .map((g) => g.temperatureK);
  const Tg = own.length > 0 ? mean(own) : glass.glassTransitionK;
  if (Tg === undefined) return [];
  const numbers = stabilityNumbers(Tg, mean(same.map((s) => s.event.onsetK)), facts.meltingK);
  const rest = {
    interval: 'student_t' as const,
    scan_count: same.length,
    rate_min_K_per_s: near.event.rateKPerS,
    rate_max_K_per_s: near.event.rateKPerS,
  };
  const row = (quantity: string, unit: string, value: number) =>
    makeParameter(base, quantity, 'stability', unit, value, undefined, rest);
  return [
    row('supercooled_range', 'K', numbers.supercooledRangeK),
    ...(numbers.reducedGlassTransition !== undefined
      ? [row('reduced_glass_transition', '1', numbers.reducedGlassTransition)]
      : []),
    ...(numbers.hruby !== undefined ? [row('hruby', '1', numbers.hruby)] : []),
  ];
}

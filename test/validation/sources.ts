/**
 * Where expected numbers come from. `printed`: they stand in the source. `computed`: worked out apart from this project, from what the
 * source prints or from the law itself. `memory`: nobody looked it up.
 */
export interface Source {
  kind: 'printed' | 'computed' | 'memory';
  text: string;
}

const doi = (id: string) => `doi ${id}`;
const printed = (text: string): Source => ({ kind: 'printed', text });
const computed = (text: string): Source => ({ kind: 'computed', text });
const memory = (text: string): Source => ({ kind: 'memory', text: `${text} (from memory)` });

const APART = 'least squares apart on the table of ';

export const SOURCES = {
  geSbSe: printed(`Ge10Se75Sb15, ${doi('10.1016/j.jnoncrysol.2014.03.029')}, tables 1 and 2`),
  geSbSeApart: computed(`${APART}${doi('10.1016/j.jnoncrysol.2014.03.029')}`),
  geGaSeApart: computed(`${APART}${doi('10.1016/S0022-3093(01)01127-9')}`),
  zrCuApart: computed(`${APART}${doi('10.1016/S0022-3093(02)01326-1')}`),
  niTiApart: computed(`${APART}${doi('10.1016/j.jnoncrysol.2007.01.006')}`),
  niTi: printed(`Ni50Ti50 film, ${doi('10.1016/j.jnoncrysol.2007.01.006')}`),
  liTiApart: computed(`${APART}${doi('10.1016/j.jnoncrysol.2014.10.023')}`),
  liTi: printed(`Li-Ti phosphate, ${doi('10.1016/j.jnoncrysol.2014.10.023')}`),
  srApart: computed(`${APART}${doi('10.1016/j.ssi.2009.12.005')}`),
  seGePbApart: computed(`${APART}${doi('10.1016/j.jnoncrysol.2009.04.032')}`),
  seGePb: printed(`Se-Ge-Pb, ${doi('10.1016/j.jnoncrysol.2009.04.032')}, Lasocka lines`),
  exactJmak: computed('exact JMAK peaks, E = 200 kJ/mol, n = 3, by mpmath at 40 digits'),
  parallel: computed(
    'two parallel first-order reactions by mpmath at 40 digits (kinetics of Brown et al. 2000, Thermochim. Acta 355:125)',
  ),
  pegFumarate: printed(`PEG fumarate copolymer, ${doi('10.1155/2022/3514358')}, table 3`),
  kRbSbS: computed(`mean mE over mean n of ${doi('10.1016/j.jnoncrysol.2008.03.020')} (printed there 261.9)`),
  scipy: computed('SciPy, test/reference/scipy/analyse.py'),
  scipyForecast: computed('SciPy, test/reference/scipy/forecast_profiles.py'),
  mpmath: computed('mpmath at 60 digits'),
  abramowitzStegun: memory('Abramowitz & Stegun 1964, table 5.1; mpmath agrees'),
  nistHandbook: printed('NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7'),
  nistReference: printed('NIST Statistical Reference Datasets, certified values'),
  savitzkyGolay: printed('Savitzky & Golay 1964, table I'),
  dottie: memory('root of cos x = x'),
  its90: printed('ITS-90 fixed points, Preston-Thomas, Metrologia 27 (1990) 3'),
  indiumEnthalpy: printed('Archer & Rudtsch, J. Chem. Eng. Data 48 (2003) 1157'),
  handbookEnthalpy: printed('CRC Handbook, enthalpies of fusion'),
  tinEnthalpy: memory('GEFTA recommendation for tin'),
  sippRichet: printed(`silicate melts, ${doi('10.1016/S0022-3093(02)00948-1')}, tables 2–4`),
  oxideVft: computed(
    'worked by hand from VFT coefficients in the supplement of Jiusti et al. 2020, J. Am. Ceram. Soc. 103',
  ),
  casMelt: printed(`calcium aluminosilicate melt 1, ${doi('10.1016/j.jnoncrysol.2004.02.009')}, tables 2 and 3`),
  asSe: printed(`As–Se, ${doi('10.1016/S0022-3093(02)01522-3')}, table 1`),
  lasGrowth: printed(`lithium aluminosilicate glass, ${doi('10.1016/j.jnoncrysol.2014.02.008')}, tables 1–3`),
  geSbSGrowth: printed(`Ge-Sb-S films, ${doi('10.1016/j.jnoncrysol.2014.11.017')}, tables 1–4`),
  fastestGrowth: printed(
    'temperature of fastest growth, supplement of Jiusti et al. 2020, J. Am. Ceram. Soc. 103:921; enthalpies of melting from memory',
  ),
  decouplingTrend: memory('Ediger, Harrowell & Yu 2008, J. Chem. Phys. 128:034709, coefficients'),
  oxideStability: printed('supplement to a study of glass-stability parameters of oxides'),
  zrAlloys: printed(`Zr-based alloys, ${doi('10.1016/S0022-3093(02)01876-8')}, table 1`),
} as const satisfies Record<string, Source>;

export type SourceName = keyof typeof SOURCES;

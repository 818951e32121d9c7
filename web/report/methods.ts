/** How a method gets its number, in one sentence, and where it is published. */
interface MethodText {
  text: string;
  source: string;
}

/** By the method code of the parameters table. */
export const METHOD_TEXTS: Record<string, MethodText> = {
  kissinger: {
    text: 'ln(β/Tp²) against 1/Tp over the peak temperatures Tp at the heating rates β; the slope is −E/R.',
    source: 'Kissinger 1957',
  },
  augis_bennett: {
    text: 'ln(β/(Tp − T0)) against 1/Tp, T0 the start of the ramp; n from the width at half maximum.',
    source: 'Augis and Bennett 1978',
  },
  boswell: { text: 'ln(β/Tp) against 1/Tp.', source: 'Boswell 1980' },
  ozawa_flynn_wall: {
    text: 'ln β against 1/T with the slope −1.0516 E/R, its factor corrected by iteration.',
    source: 'Ozawa 1965; Flynn and Wall 1966; correction: Flynn 1983',
  },
  kissinger_akahira_sunose: {
    text: 'ln(β/T²) against 1/T at equal conversion.',
    source: 'Akahira and Sunose 1971',
  },
  starink: { text: 'ln(β/T^1.92) against 1/T at equal conversion, slope −1.0008 E/R.', source: 'Starink 2003' },
  friedman: { text: 'ln(dα/dt) against 1/T at equal conversion.', source: 'Friedman 1964' },
  vyazovkin: {
    text: 'The E at which the integrals ∫exp(−E/RT)dt over each step of conversion agree best between the scans, on the temperatures as measured.',
    source: 'Vyazovkin 2001, J. Comput. Chem. 22:178',
  },
  vyazovkin_linear: {
    text: 'The same from the start of each scan with the temperature integral of a linear programme.',
    source: 'Vyazovkin 1997; Senum and Yang 1977',
  },
  jmak: {
    text: 'One law α = 1 − exp[−(∫K dt)ⁿ], K = A exp(−E/RT), fitted to all scans of an event at once. It holds for site saturation, or where nucleation and growth have one energy.',
    source: 'Johnson and Mehl 1939; Avrami 1939–1941; Kolmogorov 1937; Henderson 1979',
  },
  jmak_isothermal: {
    text: 'The same law fitted to each hold, n and the induction time in one fit; E from ln K against 1/T.',
    source: 'Avrami 1939–1941',
  },
  ozawa: { text: 'ln[−ln(1−α)] against ln β at constant temperature; the slope is −n.', source: 'Ozawa 1971' },
  matusita_sakka: {
    text: 'ln[−ln(1−α)] = −n ln β − 1.052 m E/(RT), m = n for nuclei that exist before the scan.',
    source: 'Matusita and Sakka 1980',
  },
  sestak_berggren: {
    text: 'dα/dt = A exp(−E/RT) α^M (1−α)^N, where the JMAK law does not describe the curves.',
    source: 'Šesták and Berggren 1971',
  },
  shared_law: {
    text: 'One JMAK law with a rate constant that may bend, shared by all instruments, offsets and lags free within their calibration.',
    source: 'this program’s methods page, section 8',
  },
  area: { text: 'Area of the event above its baseline over the mass.', source: 'ISO 11357-1' },
  moynihan: {
    text: 'ln β against 1/Tg, each scan cooled through the glass transition at its own heating rate.',
    source: 'Moynihan et al. 1974',
  },
  viscosity: { text: 'From the viscosity table of the campaign.', source: 'Mauro et al. 2009, PNAS 106:19780' },
  stability: {
    text: 'From the glass transition, crystallisation and melting temperatures at one rate.',
    source: 'Hrubý 1972',
  },
};

/** What holds for every sample, a paragraph each. */
export const GENERAL_METHODS: readonly string[] = [
  'Each file was read as it came; its bytes are identified by SHA-256 below. Exotherms are drawn up. The heating rate is the slope of the measured temperature over the event, not the nominal rate.',
  'Temperatures: offset and lag × heating rate of the instrument are taken off. Where standards were run, both come from extrapolated melting onsets (ISO 11357-1, ASTM E967), the heat from their areas (ASTM E968); otherwise from instruments.csv, or, where nothing is known, from a wide prior that widens the intervals.',
  'Events: excursions above robust noise; the baseline under an event goes over from the tangent before to the tangent behind in proportion to conversion. Conversion is the area done over the whole area, kept at 0.01 to 0.99. Events that overlap are separated by asymmetric peaks around the JMAK shape (after Perejón et al. 2011, J. Phys. Chem. B 115:1780) and flagged.',
  'Isoconversional methods follow the recommendations of the ICTAC Kinetics Committee (Vyazovkin et al. 2011, Thermochim. Acta 520:1; 2014, 590:1; 2020, 689:178597): conversion 0.05 to 0.95 in steps of 0.05; the value quoted is the mean over 0.1 to 0.9.',
  'Intervals hold 95 % (99 % for the bend). They come from a Monte Carlo that draws the calibration of each instrument, the baseline of each scan and the scatter between scans, and refits everything on the same draw: estimate ± Student’s t × spread of the draws. The seed is made from the inputs, so that the same inputs give the same numbers.',
];

export const VERDICT_METHOD =
  'Verdict on the bend: the time centroids of one event on all instruments are fitted by laws with and without a bend, an offset and a lag of either sign free for each instrument. A lag shifts in proportion to the rate within one instrument; a bend of the material is smooth across instruments. “Material” when the 99 % interval of the bend excludes zero.';

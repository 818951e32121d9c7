/**
 * Flags: what the user should know about a scan, sample or instrument.
 * A flag carries the number that raised it and what to do next; the table below is the closed list of codes.
 */
export type Severity = 'note' | 'warn' | 'stop';

export interface Flag {
  severity: Severity;
  code: FlagCode;
  sample?: string;
  instrument?: string;
  file?: string;
  event?: number;
  /** One sentence in plain words with the number that triggered it. */
  detail: string;
  /** What to do next. */
  action: string;
}

/** code → severity by default and one-line meaning. Severity may be raised where a flag is made, never lowered. */
export const FLAG_CODES = {
  'sign-inferred': ['warn', 'exotherm direction was worked out from the curve'],
  'sign-unknown': ['stop', 'exotherm direction is stated nowhere and cannot be worked out'],
  'unit-unknown': ['stop', 'a column has a unit that is not known'],
  'file-damaged': ['stop', 'the file cannot be read as a scan'],
  'rows-repaired': ['note', 'repeated time stamps were averaged or a few bad rows dropped'],
  'signal-clipped': ['warn', 'the signal sits at its limit'],
  spike: ['note', 'single-point spikes were bridged'],
  'no-event': ['note', 'no exotherm was found in the analysed segment'],
  'event-cut': ['warn', 'the event is cut by the end of the segment'],
  'event-small': ['warn', 'the area is below five times its baseline error'],
  'limits-unused': ['warn', 'limits in kelvin say nothing on a hold'],
  'events-merged': ['note', 'overlapping events were separated by fitted peaks'],
  'few-points': ['warn', 'too few points over the event'],
  'baseline-doubt': ['warn', 'the choice of baseline moves the result noticeably'],
  'melting-overlap': ['warn', 'melting follows before the signal returns to the baseline'],
  'glass-transition-overlap': ['warn', 'the glass transition lies too close before the event'],
  'glass-transition-doubtful': ['note', 'steps of the signal that may be a glass transition, and none was taken'],
  'mass-unknown': ['note', 'no mass: no enthalpy per gram'],
  'rate-off-nominal': ['warn', 'measured heating rate differs from the nominal one by more than 2 %'],
  'rate-unsteady': ['warn', 'heating rate drifts by more than 5 % within the event'],
  'lag-unknown': ['warn', 'instrument has neither standards nor sheet values for lag and offset'],
  'response-unknown': ['warn', 'the smearing part of the lag is not known and matters here'],
  'lag-negative': ['warn', 'fitted net lag is below zero by more than two errors'],
  'self-heating': ['warn', 'the event warms the sample noticeably'],
  'self-heating-unknown': [
    'note',
    'the sample’s part of the lag is not known, and a tenth of the lag would be too much',
  ],
  'crystallises-from-glass': ['note', 'peak lies below the glass transition at its rate'],
  'few-rates': ['stop', 'fewer than three distinct heating rates'],
  'narrow-span': ['warn', 'heating rates span less than a factor of ten'],
  'decade-gap': ['warn', 'an empty decade of rate lies between two filled ones'],
  'no-replicate': ['note', 'no rate was measured twice'],
  'instruments-not-bridged': ['warn', 'two instruments share no heating rate'],
  'no-standard': ['note', 'no scan of a standard exists for an instrument'],
  'standard-unused': ['warn', 'a scan of a standard could not be used for the calibration'],
  'reference-unused': ['stop', 'the reference to subtract is missing or cannot be used'],
  'start-too-near': ['note', 'the ramp starts too near the peak for this method'],
  'energy-varies': ['warn', 'activation energy changes with conversion'],
  'not-avrami': ['warn', 'the curves do not follow the JMAK law'],
  'fit-not-converged': ['warn', 'a fit stopped without converging'],
  outlier: ['warn', 'a scan lies far from the fit of its fellows'],
  'rate-independent': ['stop', 'the temperature of the event does not rise with heating rate'],
  'onset-above-peak': ['warn', 'the onset of a scan lies above its peak'],
  'series-not-monotonic': [
    'warn',
    'a temperature falls where the rate rises, or a rate constant does not follow temperature',
  ],
  'energy-undetermined': ['warn', 'the data do not determine an activation energy'],
  'negative-energy': ['note', 'the rate falls with rising temperature'],
  'hold-late': ['warn', 'much had crystallised before the hold temperature was reached'],
  'mixed-programmes': ['note', 'ramps and holds share an isoconversional fit'],
  'method-not-applicable': ['note', 'a method was not computed because its conditions are not met'],
  'exponent-reading': ['note', 'what the Avrami exponent may mean for nucleation and growth'],
  cooling: ['note', 'a cooling scan: heating methods do not apply'],
  'file-missing': ['warn', 'the sheet names a file that did not come'],
  'file-unassigned': ['warn', 'a file came that no sheet row or folder names'],
  'sheet-damaged': ['stop', 'a sheet or one of its rows cannot be read'],
  'sheet-unused': ['note', 'a sheet came that no step of this version reads'],
  'sheet-column-unused': ['note', 'a column of a sheet has a header that no sheet column has'],
  'archive-member-skipped': ['note', 'an entry of an archive that holds no data was left out'],
  'correction-replaced': ['note', 'a later sheet changed a cell that had been corrected by hand: the sheet counts'],
  'same-bytes': ['note', 'the same bytes came again under another name and count once'],
  'peak-error-assumed': ['note', 'a table of temperatures states no errors'],
  'forecasts-disagree': ['warn', 'model-free forecast and shared law differ by more than a factor of three'],
  extrapolates: ['warn', 'a forecast lies outside the measured temperatures'],
  'crosses-glass-transition': ['warn', 'a forecast lies on the other side of the glass transition than the data'],
  'forecast-straight': ['warn', 'a model-free forecast is straight while the material’s law bends'],
  'not-reached': ['note', 'a conversion is not reached within the programme or below any temperature'],
  'quench-nuclei': ['warn', 'a critical cooling rate from heating data counts the nuclei of the quench'],
  'too-few-scans': ['warn', 'too few scans to tell a bend of the material from a lag'],
  'lag-beyond-calibration': ['warn', 'an instrument lags by more than its calibration allows'],
  'state-differs': ['warn', 'the sample behaves as if it were in another state on another instrument'],
  'opinions-differ': ['warn', 'peak or mid-conversion temperatures give another bend than the time centroids'],
  'glass-history': ['note', 'no fragility from heating scans that were not cooled at their own rate'],
  'driving-force-ignored': ['warn', 'no melting data: the driving force of crystallisation counts as full'],
} as const satisfies Record<string, readonly [Severity, string]>;

export type FlagCode = keyof typeof FLAG_CODES;

/** Makes a flag with its default severity. */
export function flag(
  code: FlagCode,
  detail: string,
  action: string,
  where: Partial<Pick<Flag, 'severity' | 'sample' | 'instrument' | 'file' | 'event'>> = {},
): Flag {
  return { severity: FLAG_CODES[code][0], code, detail, action, ...where };
}

/** Longest quotation from a file shown to the user, characters. */
export const QUOTE_LIMIT = 80;

/** Text quoted from a file: in « », cut to 80 characters, control characters made visible, so that no cell starts like a formula. */
export function quote(text: string): string {
  // biome-ignore lint/suspicious/noControlCharactersInRegex: control characters are what is being replaced
  const clean = text.replace(/[\u0000-\u001f\u007f]/g, '·');
  return `«${clean.length > QUOTE_LIMIT ? `${clean.slice(0, QUOTE_LIMIT - 1)}…` : clean}»`;
}

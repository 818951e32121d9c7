import type { InstrumentCalibration, InstrumentSheetRow } from '../../schema/wire/scan.ts';

/** Rate from which an instrument of unstated kind is taken for a chip, K/s (furnaces to about 8, chips from about 10). */
const CHIP_FROM_K_PER_S = 10;
/** Prior of an instrument that says nothing about itself. */
const PRIOR_OFFSET_SE_K = { furnace: 0.5, chip: 1 } as const;
const PRIOR_LAG_SCALE_S = { furnace: 3, chip: 0.3e-3 } as const;
/** Error of a lag that the sheet gives without one, as a fraction of it: about what a standard of other mass and contact leaves. */
const LAG_ERROR_FRACTION = 0.1;

/**
 * The correction of an instrument from its sheet row, or the prior where the row has neither lag nor offset.
 * @param highestRateKPerS of the instrument's scans, K/s; decides the kind where the row does not
 * @returns SI; `source` 'prior' keeps lag and offset at 0 and carries the whole doubt in the standard errors
 */
export function calibrationFromSheet(
  instrument: string,
  row: InstrumentSheetRow | undefined,
  highestRateKPerS: number,
): InstrumentCalibration {
  const kind = row?.kind ?? (highestRateKPerS >= CHIP_FROM_K_PER_S ? 'chip' : 'furnace');
  const stated = row?.lagS !== undefined || row?.offsetK !== undefined;
  const lagS = row?.lagS ?? 0;
  return {
    instrument,
    kind,
    source: stated ? 'sheet' : 'prior',
    offsetK: row?.offsetK ?? 0,
    offsetSeK: row?.offsetErrorK ?? PRIOR_OFFSET_SE_K[kind],
    lagS,
    lagSeS: row?.lagErrorS ?? (row?.lagS === undefined ? PRIOR_LAG_SCALE_S[kind] : LAG_ERROR_FRACTION * Math.abs(lagS)),
    ...(row?.responseS !== undefined && { responseS: row.responseS }),
    ...(row?.sensitivityVPerW !== undefined && { sensitivityVPerW: row.sensitivityVPerW }),
    standards: 0,
  };
}

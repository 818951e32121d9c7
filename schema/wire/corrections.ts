import type { ScanSheetRow } from './scan.ts';

/**
 * Fields of a scan that can be corrected by hand (PATCH /scans/:id). Each is a cell of scans.csv in SI, or one of the two that only a
 * correction can say. A correction stands over the sheet until that cell changes in a later sheet.
 */
export const CORRECTION_FIELDS = [
  'sample',
  'instrument',
  'role',
  'rateKPerS',
  'massKg',
  'exotherm',
  'replicate',
  'segment',
  'reference',
  'note',
  'limitsK',
  'excluded',
] as const satisfies readonly (keyof ScanSheetRow)[];

export type CorrectionField = (typeof CORRECTION_FIELDS)[number];
export type CorrectionValue = string | number | [number, number] | null;

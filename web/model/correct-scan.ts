import type { ScanCorrections } from '../client/scans.ts';

/** What the form holds: texts as typed; empty and `sheet` stand for what sheet and file say. */
export interface CorrectionForm {
  exotherm: 'sheet' | 'up' | 'down';
  massMg: string;
  /** K; missing: as they were found */
  limitsK: [number, number] | undefined;
  isExcluded: boolean;
  reason: string;
}

export const formOf = (standing: ScanCorrections): CorrectionForm => ({
  exotherm: standing.exotherm ?? 'sheet',
  massMg: standing.mass_mg === undefined || standing.mass_mg === null ? '' : String(standing.mass_mg),
  limitsK: standing.limits_K ?? undefined,
  isExcluded: typeof standing.excluded === 'string',
  reason: standing.excluded ?? '',
});

/** The fields that the form changes, null where a correction is taken back; nothing else is sent. */
export function changesOf(form: CorrectionForm, standing: ScanCorrections): ScanCorrections {
  const wanted: Required<ScanCorrections> = {
    exotherm: form.exotherm === 'sheet' ? null : form.exotherm,
    mass_mg: form.massMg.trim() === '' ? null : Number(form.massMg),
    limits_K: form.limitsK ?? null,
    excluded: form.isExcluded ? form.reason.trim() : null,
  };
  const isSame = (a: unknown, b: unknown): boolean => JSON.stringify(a ?? null) === JSON.stringify(b ?? null);
  return Object.fromEntries(
    Object.entries(wanted).filter(([field, value]) => !isSame(value, standing[field as keyof ScanCorrections])),
  );
}

import { z } from '@hono/zod-openapi';
import type { Corrections } from '../../jobs/store/index.ts';
import type { CorrectionField, CorrectionValue } from '../../schema/wire/corrections.ts';
import { EXOTHERM_DIRECTIONS, ROLES } from '../../schema/wire/states.ts';
import { oneOf, strict, textOf } from '../openapi.ts';

const KG_TO_MG = 1e6;

const nameError = 'a name of 1 to 200 characters without control characters that does not start with = + - or @';
const name = z
  .string({ error: nameError })
  .max(200, { error: nameError })
  .regex(/^[^=+\-@\p{Cc}][^\p{Cc}]*$/u, { error: nameError });
const massError = 'a mass above 0, mg';
const rateError = 'a heating rate other than 0, K/s';
const segmentError = 'a whole number from 1';
const limitsError = 'two temperatures in K, the lower one first';
const kelvin = z.number({ error: limitsError }).positive({ error: limitsError });

/** Null takes a correction back: the sheet counts again. */
export const CorrectionsBody = strict({
  sample: name.nullable().optional(),
  instrument: name.nullable().optional(),
  role: oneOf(ROLES).nullable().optional(),
  rate_nominal_K_per_s: z
    .number({ error: rateError })
    .refine((v) => v !== 0, { error: rateError })
    .nullable()
    .optional(),
  mass_mg: z.number({ error: massError }).positive({ error: massError }).nullable().optional(),
  exotherm: oneOf(EXOTHERM_DIRECTIONS).nullable().optional(),
  replicate: textOf(200).nullable().optional(),
  segment: z
    .number({ error: segmentError })
    .int({ error: segmentError })
    .min(1, { error: segmentError })
    .nullable()
    .optional(),
  reference: textOf(512).nullable().optional(),
  note: textOf(1000).nullable().optional(),
  limits_K: z
    .tuple([kelvin, kelvin], { error: limitsError })
    .refine(([low, high]) => low < high, { error: limitsError })
    .nullable()
    .optional()
    .openapi({ description: 'Where the baseline of the event is tied, K.' }),
  excluded: textOf(1000).nullable().optional().openapi({ description: 'Why the scan stays out.' }),
}).openapi('ScanCorrections');
export type CorrectionsBody = z.infer<typeof CorrectionsBody>;

/** Names outside, with unit, of the fields inside, in SI. */
const OUTSIDE = {
  sample: 'sample',
  instrument: 'instrument',
  role: 'role',
  rateKPerS: 'rate_nominal_K_per_s',
  massKg: 'mass_mg',
  exotherm: 'exotherm',
  replicate: 'replicate',
  segment: 'segment',
  reference: 'reference',
  note: 'note',
  limitsK: 'limits_K',
  excluded: 'excluded',
} as const satisfies Record<CorrectionField, keyof CorrectionsBody>;

export function correctionsOf(body: CorrectionsBody): Corrections {
  const changes: Corrections = {};
  for (const field of Object.keys(OUTSIDE) as CorrectionField[]) {
    const value = body[OUTSIDE[field]];
    if (value === undefined) continue;
    changes[field] = field === 'massKg' && typeof value === 'number' ? value / KG_TO_MG : value;
  }
  return changes;
}

export const outsideName = (field: CorrectionField): string => OUTSIDE[field];
export const outsideValue = (field: CorrectionField, value: CorrectionValue): CorrectionValue =>
  field === 'massKg' && typeof value === 'number' ? Number((value * KG_TO_MG).toPrecision(12)) : value;

const value = z.union([z.string(), z.number(), z.array(z.number())]).nullable();

export const CorrectedShape = z
  .record(z.string(), value)
  .openapi({ description: 'Fields that were corrected by hand, with the value that counts.' });

export const HistoryShape = z
  .object({
    field: z.string(),
    before: value,
    after: value,
    cause: z.enum(['correction', 'sheet']).openapi({
      description: '`sheet`: a later sheet changed the cell, so that the correction no longer counts.',
    }),
    at: z.string().openapi({ format: 'date-time' }),
  })
  .openapi('ScanHistoryEntry');

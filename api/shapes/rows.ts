import { z } from '@hono/zod-openapi';
import type { ZodRawShape } from 'zod';
import type { ResultTable } from '../../schema/wire/result-tables.ts';
import { INSTRUMENT_KINDS, ROLES, SCAN_STATES } from '../../schema/wire/states.ts';

const text = z.string();
const maybeText = z.string().nullable();
const number = z.number();
const maybeNumber = z.number().nullable();
const count = z.number().int();
const maybeCount = z.number().int().nullable();
const texts = z.array(z.string());

/** Rows of the result tables: keys and order are the columns of schema/wire/result-tables.ts (a test compares them). */
export const ROW_SHAPES = {
  parameters: z.object({
    sample: text,
    event: count,
    quantity: text,
    method: text,
    conversion: maybeNumber,
    temperature_K: maybeNumber,
    value: number,
    unit: text,
    lower95: maybeNumber,
    upper95: maybeNumber,
    scan_count: count,
    rate_min_K_per_s: number,
    rate_max_K_per_s: number,
    flags: texts,
    interval: z.enum(['monte_carlo', 'student_t', 'f_ratio']),
    variant: z.enum(['', 'peak', 'without_outliers', 'full_response']),
  }),
  scans: z.object({
    file: text,
    sha256: text,
    sample: maybeText,
    instrument: maybeText,
    role: z.enum(ROLES),
    event: maybeCount,
    status: z.enum(SCAN_STATES),
    reason: maybeText,
    rate_nominal_K_per_s: maybeNumber,
    rate_K_per_s: maybeNumber,
    mass_mg: maybeNumber,
    glass_transition_K: maybeNumber,
    onset_K: maybeNumber,
    peak_K: maybeNumber,
    end_K: maybeNumber,
    width_K: maybeNumber,
    enthalpy_J_per_g: maybeNumber,
    flags: texts,
    segment: maybeCount,
    replicate: maybeText,
    centroid_K: maybeNumber,
  }),
  conversion: z.object({
    file: text,
    segment: count,
    sample: text,
    instrument: text,
    event: count,
    conversion: number,
    time_s: number,
    temperature_K: number,
    rate_per_s: number,
  }),
  instruments: z.object({
    instrument: text,
    kind: z.enum(INSTRUMENT_KINDS),
    offset_K: number,
    offset_se_K: number,
    lag_s: number,
    lag_se_s: number,
    heat_factor: maybeNumber,
    heat_factor_se: maybeNumber,
    standards: count,
    source: z.enum(['standards', 'sheet', 'prior']),
    offset_slope: maybeNumber,
    response_time_s: maybeNumber,
  }),
  coverage: z.object({
    sample: text,
    decade_low_K_per_s: number,
    decade_high_K_per_s: number,
    instrument: text,
    scan_count: count,
    rates: z.array(number),
  }),
  gaps: z.object({ sample: text, code: text, detail: text, action: text }),
  flags: z.object({
    severity: z.enum(['note', 'warn', 'stop']),
    code: text,
    sample: maybeText,
    instrument: maybeText,
    file: maybeText,
    event: maybeCount,
    detail: text,
    action: text,
  }),
} as const satisfies Record<ResultTable, z.ZodObject<ZodRawShape>>;

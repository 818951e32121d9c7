import { z } from '@hono/zod-openapi';
import { SCAN_STATES } from '../../schema/wire/states.ts';
import { CampaignShape, StatusShape } from './campaign.ts';
import { CurvesShape } from './curves.ts';
import { ROW_SHAPES } from './rows.ts';

/** The scans of a sample with their ids. */
export const SampleScansShape = z.array(
  z.object({ id: z.string(), file: z.string(), instrument: z.string(), status: z.enum(SCAN_STATES) }),
);

const { conversion: _, forecasts: __, ...shown } = ROW_SHAPES;
const tables = Object.fromEntries(Object.entries(shown).map(([table, row]) => [table, z.array(row)])) as {
  [Table in keyof typeof shown]: z.ZodArray<(typeof shown)[Table]>;
};

export const OverviewShape = z
  .object({
    campaign: CampaignShape,
    status: StatusShape,
    state: z.string().openapi({ description: 'Names this state to `…/stream` as its Last-Event-ID.' }),
    tables: z.object(tables).partial(),
    is_whole: z.boolean(),
    scans: SampleScansShape.optional(),
    outlines: z.array(CurvesShape).optional(),
  })
  .openapi('Overview');

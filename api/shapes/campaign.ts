import { z } from '@hono/zod-openapi';
import type { Campaign } from '../../jobs/store/index.ts';
import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import { JOB_STATES, SAMPLE_STATES, SCAN_STATES, type ScanState } from '../../schema/wire/states.ts';

const count = z.number().int().min(0);
const time = z.string().openapi({ format: 'date-time' });

export const CampaignShape = z
  .object({
    id: z.string(),
    name: z.string(),
    created_at: time,
    instruments: z
      .array(z.object({ id: z.string(), instrument: z.string() }))
      .optional()
      .openapi({ description: 'Only where one campaign is asked for.' }),
    revision: count.openapi({ description: 'Grows with every change of anything that the campaign shows.' }),
  })
  .openapi('Campaign');

export const campaignBody = ({ id, name, createdAt, revision }: Campaign) => ({
  id,
  name,
  created_at: new Date(createdAt).toISOString(),
  revision,
});

export const StatusShape = z
  .object({
    settled: z.boolean(),
    scans: z.object(Object.fromEntries(SCAN_STATES.map((state) => [state, count])) as Record<ScanState, typeof count>),
    samples: z.array(
      z.object({
        id: z.string(),
        sample: z.string(),
        state: z.enum(SAMPLE_STATES),
        reason: z.string().optional(),
        verdict: z.string().optional(),
      }),
    ),
    jobs: z.object({ queued: count, running: count, failed: count, oldest_age_s: z.number().nullable() }),
    eta_s: z.number().nullable(),
  })
  .openapi('CampaignStatus') satisfies z.ZodType<CampaignStatus>;

export const JobShape = z
  .object({
    id: z.string(),
    campaign_id: z.string(),
    step: z.string(),
    subject: z.string().openapi({ description: 'Id of the file, scan, sample or campaign that the step works on.' }),
    state: z.enum(JOB_STATES),
    attempts: count,
    last_error: z.string().nullable(),
    next_try_at: time,
    created_at: time,
    started_at: time.nullable(),
    finished_at: time.nullable(),
  })
  .openapi('Job');

export const ReceivedShape = z
  .object({
    file: z.string(),
    outcome: z.enum(['accepted', 'known', 'replaced', 'sheet', 'archive', 'refused']),
    scan_ids: z.array(z.string()).optional(),
    job_id: z.string().optional(),
    reason: z.string().optional(),
    replaces: z.string().optional().openapi({
      description:
        'The other name of one path (`x.txt` and `x.txt.gz`) under which it came before: unless the bytes are the same, that no longer counts.',
    }),
  })
  .openapi('ReceivedFile');

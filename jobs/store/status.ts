import type { CampaignStatus } from '../../schema/wire/campaign.ts';
import type { Ports } from '../ports/index.ts';

/** Where the campaign stands (the body of GET /campaigns/:id/status). */
export async function campaignStatus(_ports: Ports, _campaignId: string): Promise<CampaignStatus> {
  throw new Error('not written yet');
}

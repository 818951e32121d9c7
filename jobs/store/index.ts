/** Every SQL statement of the project lives in this room; this is what the API, the command line and the steps use of it. */

export type { FileReceipt } from './arrivals.ts';
export {
  CAMPAIGN_NAME_LIMIT,
  type Campaign,
  createCampaign,
  deleteCampaign,
  findCampaign,
  LOCAL_LAB,
  listCampaigns,
  type Page,
  renameCampaign,
} from './campaigns.ts';
export { type Corrections, correctScan, type HistoryEntry, readScanHistory } from './correction-rows.ts';
export { jobFigures } from './figures.ts';
export { isBlobStoreMarked, markBlobStore } from './identity.ts';
export { type JobView, listJobs, refitCampaign, retryJob } from './job-views.ts';
export { readSamplePlots } from './judge-rows.ts';
export { sweepOrphanBlobs } from './orphan-blobs.ts';
export { setGoals } from './question-rows.ts';
export { FILE_LIMIT_BYTES, receiveFile } from './receive.ts';
export { StoreRefusal, type StoreRefusalCode } from './refusals.ts';
export { claimReply, dropReply, keepReply, sweepReplies } from './replies.ts';
export { listSampleScans, type SampleScan } from './sample-scans.ts';
export { findDamage, snapshotDatabase } from './snapshot.ts';
export { campaignStatus } from './status.ts';
export { type ResultRow, readCurrentTable, readTable, type TableFilter } from './tables/index.ts';
export {
  createToken,
  findTokenOwner,
  hasLiveToken,
  LONGEST_TOKEN_DAYS,
  listTokens,
  revokeToken,
  type TokenOwner,
  type TokenView,
} from './tokens.ts';
export { isStoreTrouble } from './trouble.ts';
export {
  checkStores,
  findInstrument,
  findSample,
  findScan,
  type InstrumentView,
  listInputs,
  listInstruments,
  listSamples,
  readReducedScan,
  type SampleView,
  type ScanView,
} from './views.ts';
export { withdrawMissingFiles } from './withdraw.ts';

export { type SimulatedConversion, simulateConversion } from './conversion.ts';
export { buildDemoCampaign, type DemoCampaign, type PlantedFlaw, type SampleTruth } from './demo-campaign.ts';
export type { GoalTruth } from './demo-goals.ts';
export { followProgramme, linearRamp, type Programme } from './programme.ts';
export {
  type ArrheniusLaw,
  arrheniusLawAt,
  type BentLaw,
  bentLawBetween,
  lnRateConstant,
  localEnergy,
  type RateLaw,
} from './rate-law.ts';
export {
  applyResponse,
  type NoiseSource,
  type SimulatedInstrument,
  type SimulatedMaterial,
  type SimulatedScan,
  simulateScan,
} from './scan.ts';
export { encodeText, type ScanColumns, type TextDialect, writeScanText } from './scan-text.ts';

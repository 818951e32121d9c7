/**
 * The second source of simulated truth: an adaptive integrator, own laws, own lag, own text. It imports nothing from
 * outside this folder, so that a formula shared by maker and fitter cannot hide its own error.
 */
export { buildCampaign, type Campaign, type CampaignPlan, type ScanPlan } from './campaign.ts';
export { type Dialect, drawDialects, PLAIN_DIALECT } from './dialects.ts';
export { type EventTruth, eventTruths } from './event-truth.ts';
export { createStepper, type Derivative, integrate, TIGHT } from './integrator.ts';
export { programmeLimits, roughTemperature } from './plan-range.ts';
export { createProgramme, type LegSettings, type Programme, rampProgramme } from './programme.ts';
export { type Random, seededRandom } from './random.ts';
export { jmakLaw, type RateLaw, sestakBerggrenLaw } from './rate-laws.ts';
export { type RecordedScan, type RecordingSettings, recordScan, samplingTimes } from './recording.ts';
export type { InstrumentModel, SampleModel, ScanModel, ScanSolution, ThermalEvent } from './scan-model.ts';
export { solveScan } from './solve-scan.ts';
export { METALS, solveStandard } from './standards.ts';
export {
  arrheniusLaw,
  arrheniusLawWithPeak,
  bentLaw,
  decoupledLaw,
  glassTransitionAtRate,
  log10Viscosity,
  R,
  type TemperatureLaw,
} from './temperature-laws.ts';
export { type WriteSettings, writeScan } from './write-scan.ts';

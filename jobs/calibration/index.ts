export { findReferenceSubstance, REFERENCE_SUBSTANCES, type ReferenceSubstance } from './metals.ts';
export { calibrationFromSheet } from './sheet.ts';
export { calibrateFromStandards, type StandardObservation } from './standards.ts';

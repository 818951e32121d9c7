import { forecastSample } from '../campaign/forecast-sample.ts';
import { judgeCurvature } from '../glass/index.ts';
import { readScan } from '../instrument/index.ts';
import { fitSample } from '../kinetics/index.ts';
import type { Compute } from '../ports/index.ts';
import { reduceScan } from '../reduction/index.ts';

/** The computations in this very thread: the serverless home, and tests. */
export const computeInline: Compute = {
  readScan: async (bytes, file) => readScan(bytes, file),
  reduceScan: async (scan, input) => reduceScan(scan, input),
  fitSample: async (input) => fitSample(input),
  judgeCurvature: async (input) => judgeCurvature(input),
  forecastSample: async (input) => forecastSample(input),
  close: async () => {},
};

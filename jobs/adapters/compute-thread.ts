import { move, transferableSymbol, valueSymbol } from 'piscina';
import type { FitInput } from '../../schema/wire/parameters.ts';
import type { SampleForecastInput } from '../../schema/wire/sample-forecast.ts';
import type { ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import type { JudgeInput } from '../../schema/wire/verdicts.ts';
import { forecastSample as forecastOneSample } from '../campaign/forecast-sample.ts';
import { judgeCurvature as judgeSampleCurvature } from '../glass/index.ts';
import { readScan as readScanBytes } from '../instrument/index.ts';
import { fitSample as fitSampleScans } from '../kinetics/index.ts';
import { reduceScan as reduceScanColumns } from '../reduction/index.ts';
import { transferableBuffers } from './transfer.ts';

/** What one worker thread runs; results go back without a copy of their arrays. */
const handOver = <T>(value: T) =>
  move({ [valueSymbol]: value, [transferableSymbol]: transferableBuffers(value) } as never);

/** Answers when everything is loaded. */
export const ready = () => true;
export const readScan = ({ bytes, file }: { bytes: Uint8Array; file: string }) => handOver(readScanBytes(bytes, file));
export const reduceScan = ({ scan, input }: { scan: ReadScan; input: ReduceInput }) =>
  handOver(reduceScanColumns(scan, input));
export const fitSample = ({ input }: { input: FitInput }) => handOver(fitSampleScans(input));
export const judgeCurvature = ({ input }: { input: JudgeInput }) => handOver(judgeSampleCurvature(input));
export const forecastSample = ({ input }: { input: SampleForecastInput }) => handOver(forecastOneSample(input));

import { createHash } from 'node:crypto';
import type { Compute } from '../../jobs/ports/index.ts';
import type { ForecastRow } from '../../schema/wire/forecasts.ts';
import type { FitInput, FitResult } from '../../schema/wire/parameters.ts';
import { CONVERSION_GRID, type ReduceOutcome } from '../../schema/wire/reduced.ts';
import type { SampleForecastInput, SampleForecastResult } from '../../schema/wire/sample-forecast.ts';
import type { ReadOutcome, ReadScan } from '../../schema/wire/scan.ts';
import type { ReduceInput } from '../../schema/wire/step-inputs.ts';
import type { JudgeInput, JudgeResult, VerdictRow } from '../../schema/wire/verdicts.ts';

/** How often each computation ran: a look-up runs none. */
export interface Counts {
  readScan: number;
  reduceScan: number;
  fitSample: number;
}

export interface ArithmeticCompute extends Compute {
  counts: Counts;
  /** The steps after the fit. */
  laterCounts: { judgeCurvature: number; forecastSample: number };
}

/**
 * Computations in place of the science, for tests of the pipeline: cheap, and their results depend on everything that goes
 * in, so that a wrong or stale input shows. A text `bad…` is refused, `poison…` throws, `dull…` has no known direction,
 * `rate R` heats at R K/s; `melts late A lag L` is a standard that melts A + L R above the melting point of indium.
 */
export function createArithmeticCompute(): ArithmeticCompute {
  const counts: Counts = { readScan: 0, reduceScan: 0, fitSample: 0 };
  const laterCounts = { judgeCurvature: 0, forecastSample: 0 };
  return {
    counts,
    laterCounts,
    async readScan(bytes, file) {
      counts.readScan++;
      return readText(new TextDecoder().decode(bytes), file);
    },
    async reduceScan(scan, input) {
      counts.reduceScan++;
      return reduce(scan, input);
    },
    async fitSample(input) {
      counts.fitSample++;
      return fitScans(input);
    },
    async judgeCurvature(input) {
      laterCounts.judgeCurvature++;
      return judge(input);
    },
    async forecastSample(input) {
      laterCounts.forecastSample++;
      return forecast(input);
    },
    async close() {},
  };
}

function readText(text: string, file: string): ReadOutcome {
  if (text.startsWith('poison')) throw new Error(`the reader stumbled over ${file}`);
  if (text.startsWith('bad')) {
    return { ok: false, refusal: { code: 'file-damaged', reason: `«${text}» is no scan`, action: 'Send another.' } };
  }
  const rate = Number(/rate ([\d.]+)/.exec(text)?.[1] ?? 1);
  const seed = createHash('sha256').update(text).digest()[0];
  const melts = /melts late ([\d.]+) lag ([\d.]+)/.exec(text);
  const timeS = Float64Array.from({ length: 40 }, (_, i) => i);
  return {
    ok: true,
    scan: {
      timeS,
      temperatureK: timeS.map((t) => 300 + rate * t),
      heatFlow: timeS.map((t) => (text.startsWith('dull') ? 0 : seed + t)),
      heatFlowUnit: 'W',
      columns: [],
      dialect: melts ? `melts at ${429.7485 + Number(melts[1]) + Number(melts[2]) * rate}` : 'test',
      flags: [],
    },
  };
}

function reduce(scan: ReadScan, input: ReduceInput): ReduceOutcome {
  if (scan.heatFlow[0] === 0) {
    return { ok: false, code: 'sign-unknown', reason: 'no direction', action: 'State it.', flags: [] };
  }
  const rateKPerS = scan.temperatureK[1] - scan.temperatureK[0];
  const grid = Float64Array.from(CONVERSION_GRID);
  const meltsK = Number(/melts at (.*)/.exec(scan.dialect)?.[1] ?? 0);
  const peakK =
    500 +
    scan.heatFlow[0] +
    (input.massKg ?? 0) * 1e6 +
    input.calibration.offsetK +
    (input.meltingK ?? 0) / 1000 -
    (input.reference?.heatFlow[0] ?? 0) / 1000;
  return {
    ok: true,
    reduced: {
      segments: [{ segment: 1, kind: 'heating', from: 0, to: 40, rateKPerS, startK: 300, endK: 340 }],
      segment: input.segment ?? 1,
      massKg: input.massKg,
      heatFlowUnit: 'W',
      ...(input.role === 'standard' &&
        meltsK > 0 && {
          standard: {
            rateKPerS,
            onsetK: meltsK,
            onsetErrorK: 0.01,
            peakK: meltsK + 1,
            area: 0.1,
            areaError: 0.001,
            resistanceKPerW: 50,
          },
        }),
      events: [
        {
          event: 1,
          rateKPerS,
          onsetK: peakK - 5,
          kind: 'heating',
          peakK,
          endK: peakK + 5,
          widthK: 6,
          centroidK: peakK,
          peakErrorK: 0.1,
          area: 1,
          areaError: 0.1,
          usableFrom: 0.01,
          usableTo: 0.99,
          pointsOverWidth: 20,
          noiseFraction: 0.01,
          rampStartK: 300,
          curve: {
            timeS: grid,
            temperatureK: grid.map((a) => peakK + a),
            ratePerS: grid,
            baselineErrorK: grid,
            programmeTimeS: grid.slice(0, 5),
            programmeTemperatureK: grid.slice(0, 5),
          },
        },
      ],
      trace: { temperatureK: grid.slice(), heatFlow: grid.slice(), baseline: grid.slice() },
      flags: [],
    },
  };
}

function fitScans({ sample, scans, instruments, seed }: FitInput): FitResult {
  if (scans.length < 2) {
    return { state: 'insufficient', reason: `${scans.length} scans`, parameters: [], reports: [], flags: [] };
  }
  const inputs = createHash('sha256').update(JSON.stringify([seed, instruments]));
  for (const { sha256, event } of scans) inputs.update(`${sha256} ${event.peakK} ${event.curve?.temperatureK.join()}`);
  return {
    state: 'fitted',
    parameters: [
      {
        sample,
        event: 1,
        quantity: 'activation_energy',
        method: 'kissinger',
        conversion: null,
        temperature_K: null,
        value: inputs.digest().readUInt32LE(0),
        unit: 'kJ/mol',
        lower95: null,
        upper95: null,
        scan_count: scans.length,
        rate_min_K_per_s: Math.min(...scans.map((scan) => scan.event.rateKPerS)),
        rate_max_K_per_s: Math.max(...scans.map((scan) => scan.event.rateKPerS)),
        flags: [],
        interval: 'monte_carlo',
        variant: '',
      },
    ],
    reports: [],
    flags: [],
  };
}

/** A number that depends on everything given. */
const numberOf = (value: unknown): number =>
  createHash('sha256')
    .update(JSON.stringify(value, (_, inner) => (inner instanceof Float64Array ? [...inner] : inner)))
    .digest()
    .readUInt32LE(0);

function judge({ sample, scans, instruments, facts, ranges, seed }: JudgeInput): JudgeResult {
  const rates = scans.map((scan) => scan.event.rateKPerS);
  const bend = numberOf([scans, instruments, facts, ranges, seed]);
  const row: VerdictRow = {
    sample,
    event: 1,
    verdict: 'undecided',
    bend,
    bend_lower99: null,
    bend_upper99: null,
    p_value: null,
    delta_aicc: null,
    energy_low_rate_kJ_per_mol: null,
    energy_high_rate_kJ_per_mol: null,
    instruments: instruments.map((one) => one.instrument),
    rate_min_K_per_s: Math.min(...rates),
    rate_max_K_per_s: Math.max(...rates),
    decides_next: '',
  };
  return { verdicts: scans.length > 0 ? [row] : [], events: [], parameters: [], sharedLaws: [], flags: [] };
}

function forecast({ sample, judged, goals, programmes, instruments }: SampleForecastInput): SampleForecastResult {
  const value = numberOf([judged, goals, programmes, instruments]);
  const row: ForecastRow = {
    sample,
    event: 1,
    method: 'model_free',
    conversion: 0.5,
    temperature_C: 100,
    program: programmes.map(({ name }) => name).join(),
    value,
    unit: 's',
    lower95: null,
    upper95: null,
    beyond_measured_K: 0,
    flags: [],
    question: 'time_to_conversion',
    time_s: null,
    goal: '',
    beyond_measured_decades: 0,
    detail: '',
    caution: '',
  };
  return { sources: [], forecasts: [row], advice: [], parameters: [], flags: [] };
}

import { footprintStudy } from './footprint.ts';
import { forecastStudy } from './forecast.ts';
import { forecastAdviceStudy } from './forecast-advice.ts';
import { generatorsAgree } from './generators-agree.ts';
import { holdsStudy } from './holds.ts';
import { intervalsStudy } from './intervals.ts';
import { laboratoriesStudy } from './laboratories.ts';
import { largeScanStudy } from './large-scan.ts';
import { mutatedFilesStudy } from './mutated-files.ts';
import { crashStudy, outageStudy, serverlessStudy, soakStudy } from './operation.ts';
import { packageStudy } from './package.ts';
import { reductionStudy } from './reduction.ts';
import { glassStudy } from './reduction-glass.ts';
import { requestsStudy } from './requests.ts';
import { roundTripStudy } from './round-trip.ts';
import { standardsStudy } from './standards.ts';
import { twoEventsStudy } from './two-events.ts';
import { verdictStudy } from './verdict.ts';

export interface StudyOptions {
  /** Number of samples, scans or settings; each study has its own default. */
  count?: number;
  seed: string;
}

/** A study computes and returns Markdown; it prints nothing itself. */
export type Study = (options: StudyOptions) => string | Promise<string>;

export const STUDIES: Record<string, { about: string; run: Study }> = {
  'round-trip': {
    about: 'simulated campaigns through reading, reduction and fits: error of E by method, and of n',
    run: roundTripStudy,
  },
  'generators-agree': {
    about: 'the two sources of simulated truth against each other, noise-free',
    run: generatorsAgree,
  },
  intervals: {
    about:
      'coverage and width of the 95 % intervals of E and n over settings of rates, replicates, noise and instruments',
    run: intervalsStudy,
  },
  crash: {
    about:
      'a process killed at its 1st, 2nd, 3rd … write until it survives; the next one must end with the same tables',
    run: crashStudy,
  },
  soak: {
    about:
      '8 senders, 3 workers with clocks apart, one killed every few seconds, odd deliveries: --count campaigns of 50 scans',
    run: soakStudy,
  },
  outage: {
    about: 'a remote database gone for --count seconds (60) while files arrive and workers compute',
    run: outageStudy,
  },
  footprint: {
    about: 'start-up and memory of the built serve, empty and with --count scans (10 000) in the database',
    run: footprintStudy,
  },
  serverless: {
    about: 'the demo campaign through the real serverless runtime beside Node; memory, CPU and time a step',
    run: serverlessStudy,
  },
  package: {
    about: 'the tarball of npm pack installed in an empty folder: demo, run, serve, report and typed client from it',
    run: packageStudy,
  },
  requests: {
    about: 'random requests of every role, drawn from the OpenAPI document, against what it says of each answer',
    run: requestsStudy,
  },
  reduction: {
    about: 'single simulated scans: error of Tp, T(α) and ΔH against noise, drift and points',
    run: reductionStudy,
  },
  'reduction-glass': {
    about: 'glass transitions found on simulated scans that have one, and on those that have none',
    run: glassStudy,
  },
  standards: {
    about: 'indium, tin and zinc at five rates: error and interval of offset, lag and heat factor',
    run: standardsStudy,
  },
  verdict: {
    about: 'simulated campaigns on furnace and chip: is the bend the material’s; local E, ξ, m',
    run: verdictStudy,
  },
  'mutated-files': {
    about: 'damaged files and archives through the reader: read or refused, seconds and memory',
    run: mutatedFilesStudy,
  },
  'large-scan': {
    about: 'one scan of many rows through reader and reduction: rows a second, peak memory',
    run: largeScanStudy,
  },
  laboratories: {
    about: 'measured scans of one polymer from three laboratories: glass transition and its spread',
    run: laboratoriesStudy,
  },
  'two-events': {
    about: 'two events 35 to 60 K apart at five rates: both Kissinger energies',
    run: twoEventsStudy,
  },
  holds: {
    about: 'isothermal holds at five temperatures with induction: n and E',
    run: holdsStudy,
  },
  forecast: {
    about: 'forecasts 20 to 80 K outside the data against the truth, and of simulated holds',
    run: forecastStudy,
  },
  'forecast-advice': {
    about: 'the suggested next scan run and compared with what was promised and with every other candidate',
    run: forecastAdviceStudy,
  },
};

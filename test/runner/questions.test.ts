import { expect, it } from 'vitest';
import { campaignStatus, setGoals, withdrawMissingFiles } from '../../jobs/store/index.ts';
import { forEachTest } from './each-test.ts';
import { allTables, drain, newCampaign, rowsOf, send, type TestPorts } from './test-ports.ts';

let ports: TestPorts;
let campaign: string;
forEachTest((p, c) => {
  [ports, campaign] = [p, c];
});

const SCANS = ['1', '2', '4'].map((rate) => [`A/oven/${rate}.txt`, `rate ${rate}`] as const);
const SHEETS = [
  ['goal.csv', 'sample,conversion,temperature [K],time [s]\nA,0.01,400,3600\n'],
  ['programs/reflow.csv', 'time [s],temperature [°C]\n0,25\n200,260\n'],
  ['viscosity.csv', 'sample,temperature [K],log10 viscosity [Pa s]\nA,500,11\nA,600,5\n'],
  [
    'peaks.csv',
    'sample,instrument,rate [K/s],peak [K],peak error [K]\nA,oven,8,533,0.5\nP,press,1,500,0.5\nP,press,2,510,0.5\n',
  ],
] as const;
const sendAll = async (files: readonly (readonly [string, string])[], id = campaign) => {
  for (const [path, text] of files) await send(ports, id, path, text);
};
const value = async (table: 'verdicts' | 'forecasts', sample = 'A') =>
  (await rowsOf(ports, campaign, table)).find((row) => row.sample === sample);

it('chains verdict and forecast to the fit, once for a burst, and looks them up in a refit', async () => {
  await sendAll([...SCANS, ...SHEETS]);
  await drain(ports, campaign);
  expect(ports.compute.counts.fitSample).toBe(2);
  expect(ports.compute.laterCounts).toEqual({ judgeCurvature: 2, forecastSample: 2 });
  expect((await campaignStatus(ports, campaign)).samples).toEqual([
    { sample: 'A', state: 'fitted', verdict: 'undecided' },
    { sample: 'P', state: 'fitted', verdict: 'undecided' },
  ]);
  expect(await rowsOf(ports, campaign, 'forecasts')).toMatchObject([
    { sample: 'A', program: 'programs/reflow.csv' },
    { sample: 'P' },
  ]);
});

it('gives the same tables whatever comes first', async () => {
  const files = [...SCANS, ...SHEETS];
  await sendAll(files);
  await drain(ports, campaign);
  const expected = await allTables(ports, campaign);
  for (const [turn, order] of [[...files].reverse(), [...SHEETS, ...SCANS]].entries()) {
    const other = await newCampaign(ports, `other ${turn}`);
    for (const [i, file] of order.entries()) {
      await sendAll([file], other);
      if (i % 2 === turn) await drain(ports, other);
    }
    await drain(ports, other);
    expect(await allTables(ports, other)).toBe(expected);
  }
});

it('repeats of a later sheet only what rests on it', async () => {
  await sendAll([...SCANS, ...SHEETS]);
  await drain(ports, campaign);
  const counts = { ...ports.compute.counts };
  const later = { ...ports.compute.laterCounts };
  const [verdict, forecast] = [await value('verdicts'), await value('forecasts')];

  await send(ports, campaign, 'goal.csv', 'sample,conversion,temperature [K],time [s]\nA,0.02,400,3600\n');
  await drain(ports, campaign);
  expect(await value('verdicts')).toEqual(verdict);
  expect(await value('forecasts')).not.toEqual(forecast);
  expect(ports.compute.laterCounts).toEqual({ ...later, forecastSample: later.forecastSample + 1 });

  await send(ports, campaign, 'viscosity.csv', 'sample,temperature [K],log10 viscosity [Pa s]\nA,500,11.5\nA,600,5\n');
  await drain(ports, campaign);
  expect(await value('verdicts')).not.toEqual(verdict);
  expect(ports.compute.laterCounts.judgeCurvature).toBe(later.judgeCurvature + 1);
  expect(ports.compute.counts).toEqual(counts);
});

it('judges a sample of a composition series again when another composition’s glass transition changes', async () => {
  const sheet = (wet: number) =>
    `sample,series,solvent fraction,glass transition [°C]\nA,sugar,0.05,\ndry,sugar,0,60\nwet,sugar,0.2,${wet}\nwater,sugar,1,-137\n`;
  await sendAll([...SCANS, ['samples.csv', sheet(-5)]]);
  await drain(ports, campaign);
  const counts = { ...ports.compute.counts };
  const { judgeCurvature } = ports.compute.laterCounts;
  await send(ports, campaign, 'samples.csv', sheet(-8));
  await drain(ports, campaign);
  expect(ports.compute.counts.fitSample).toBe(counts.fitSample);
  expect(ports.compute.laterCounts.judgeCurvature).toBe(judgeCurvature + 1);
});

it('sets goals through the store, beside those of the sheet', async () => {
  await sendAll([...SCANS, ...SHEETS]);
  await drain(ports, campaign);
  const forecast = await value('forecasts');
  await setGoals(ports, campaign, [{ sample: 'A', conversion: 0.5, timeS: 10 }]);
  await drain(ports, campaign);
  expect(await value('forecasts')).not.toEqual(forecast);
  await setGoals(ports, campaign, []);
  await drain(ports, campaign);
  expect(await value('forecasts')).toEqual(forecast);
});

it('shows peaks without curves as scans of their sample, and forgets them with their rows', async () => {
  await sendAll([...SCANS, ...SHEETS]);
  await drain(ports, campaign);
  expect((await rowsOf(ports, campaign, 'scans')).filter((row) => row.file === 'peaks.csv')).toMatchObject([
    { sample: 'A', instrument: 'oven', event: 1, status: 'reduced', rate_K_per_s: 8, peak_K: 533 },
    { sample: 'P', instrument: 'press', peak_K: 500 },
    { sample: 'P', instrument: 'press', peak_K: 510 },
  ]);
  expect((await rowsOf(ports, campaign, 'parameters')).map((row) => [row.sample, row.scan_count])).toEqual([
    ['A', 4],
    ['P', 2],
  ]);
  expect((await rowsOf(ports, campaign, 'coverage')).map((row) => row.sample)).toContain('P');
  expect((await rowsOf(ports, campaign, 'instruments')).map((row) => row.instrument)).toEqual(['oven', 'press']);

  await withdrawMissingFiles(ports, campaign, new Set(SCANS.map(([path]) => path)));
  await drain(ports, campaign);
  expect((await campaignStatus(ports, campaign)).samples).toMatchObject([{ sample: 'A' }]);
  expect((await rowsOf(ports, campaign, 'verdicts')).map((row) => row.sample)).toEqual(['A']);
  expect((await rowsOf(ports, campaign, 'forecasts')).map((row) => row.sample)).toEqual(['A']);
  expect((await rowsOf(ports, campaign, 'parameters')).map((row) => row.scan_count)).toEqual([3]);
});

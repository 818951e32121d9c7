import { h } from 'preact';
import { renderToString } from 'preact-render-to-string';
import { expect, test } from 'vitest';
import { bandPath, linePath } from '../../web/charts/curve-path.ts';
import { CurvePlot, layoutCurvePlot } from '../../web/charts/curve-plot.tsx';
import { createPlotScale, createTemperatureScale } from '../../web/charts/plot-scale.ts';
import { layoutLanes } from '../../web/charts/thermogram-lanes.tsx';
import { tabsFromCsv } from '../../web/client/tabs.ts';
import {
  buildLanes,
  type Curves,
  curveRows,
  curvesByEvent,
  partConversion,
  partLanes,
  splitCurves,
} from '../../web/model/curves.ts';
import { formatTime } from '../../web/model/forecast-words.ts';
import { parseRoute, samplePath } from '../../web/routes.ts';

/** Points of a path of `M x y` and relative `l dx dy` (SVG 2, section 9.3). */
function points(path: string): number[][] {
  const found: number[][] = [];
  for (const [, letter, numbers] of path.matchAll(/([Ml])([^MlZ]*)/g)) {
    const [x, y] = (numbers.match(/-?(\d+\.?\d*|\.\d+)/g) ?? []).map(Number);
    const [fromX, fromY] = letter === 'l' ? (found.at(-1) ?? []) : [0, 0];
    found.push([fromX + x, fromY + y]);
  }
  return found;
}

test('a thinned curve keeps every extreme, its ends and its order', () => {
  const x = createPlotScale([0, 1], [0, 100]);
  const y = createPlotScale([-1, 10], [100, 0]);
  const xs = Array.from({ length: 10_000 }, (_, i) => i / 9_999);
  const ys = xs.map((_, i) => (i === 5_000 ? 10 : i === 7_777 ? -1 : Math.sin(i)));
  const drawn = points(linePath(xs, ys, x, y));
  expect(drawn.length).toBeLessThan(500);
  expect(Math.min(...drawn.map(([, py]) => py))).toBeCloseTo(y.at(10), 1);
  expect(Math.max(...drawn.map(([, py]) => py))).toBeCloseTo(y.at(-1), 1);
  expect(drawn[0][0]).toBeCloseTo(x.at(0), 1);
  expect(drawn.at(-1)?.[0]).toBeCloseTo(x.at(1), 1);
  expect(drawn.every(([px], i) => i === 0 || px >= drawn[i - 1][0])).toBe(true);
});

test('a drawn line passes every measured point within its own width, upright, however few points it keeps', () => {
  const x = createPlotScale([0, 1], [0, 560]);
  const y = createPlotScale([-1, 1.2], [69, 0]);
  const xs = Array.from({ length: 500 }, (_, i) => i / 499);
  const ys = xs.map((v, i) => Math.exp(-(((v - 0.6) / 0.03) ** 2)) - 0.3 * v + 0.002 * Math.sin(i * 1.7));
  const drawn = points(linePath(xs, ys, x, y));
  expect(drawn.length).toBeLessThan(100);
  for (const [i, value] of xs.entries()) {
    const px = x.at(value);
    const k = Math.max(
      1,
      drawn.findIndex(([at]) => at >= px - 0.05),
    );
    const [[x0, y0], [x1, y1]] = [drawn[k - 1], drawn[k]];
    const at = y0 + ((y1 - y0) * (px - x0)) / (x1 - x0);
    // The stroke of a curve is 1.3 px wide.
    expect(Math.abs(at - y.at(ys[i]))).toBeLessThan(0.65);
  }
});

test('a line straight up, or turning back, keeps its points', () => {
  const scale = createPlotScale([0, 10], [0, 1000]);
  const at = (value: number) => Number(scale.at(value).toFixed(1));
  const up = points(linePath([1, 1, 1, 5], [1, 9, 2, 2], scale, scale));
  expect(up.map(([px, py]) => [Number(px.toFixed(1)), Number(py.toFixed(1))])).toEqual(
    expect.arrayContaining([
      [at(1), at(1)],
      [at(1), at(9)],
      [at(5), at(2)],
    ]),
  );
  const back = points(linePath([1, 9, 1], [1, 5, 9], scale, scale));
  expect(back.map(([px]) => Number(px.toFixed(1)))).toEqual([at(1), at(9), at(1)]);
});

test('what is not a number breaks a line and starts a new one', () => {
  const x = createPlotScale([0, 4], [0, 400]);
  const y = createPlotScale([0, 1], [100, 0]);
  const path = linePath([0, 1, 2, 3, 4], [0, 1, Number.NaN, 1, 0], x, y);
  expect(path.match(/M/g)).toHaveLength(2);
  expect(path).not.toContain('NaN');
  expect(linePath([], [], x, y)).toBe('');
});

test('a band goes along its upper edge and back along the lower one', () => {
  const scale = createPlotScale([0, 10], [0, 1000]);
  const band = points(bandPath([1, 2], [3, 4], [5, 6], scale, scale).replace('Z', ''));
  const at = (value: number) => Number(scale.at(value).toFixed(1));
  expect(band.map((point) => point.map((px) => Number(px.toFixed(1))))).toEqual([
    [at(1), at(5)],
    [at(2), at(6)],
    [at(2), at(4)],
    [at(1), at(3)],
  ]);
});

test('an axis in °C has its marks where the kelvins are', () => {
  const scale = createTemperatureScale([300, 500], [0, 400], { temperature: '°C', rate: 'K/min' });
  const hundred = scale.ticks.find(({ label }) => label === '100');
  expect(hundred?.at).toBeCloseTo(scale.at(373.15), 6);
  expect(scale.valueAt(scale.at(421))).toBeCloseTo(421, 6);
});

test('an axis without values, or with one, can still be drawn', () => {
  expect(createPlotScale([], [0, 10]).ticks.length).toBeGreaterThan(0);
  expect(createPlotScale([5, 5], [0, 10]).at(5)).toBeCloseTo(5, 6);
});

const curves = (names: string[]): Curves => ({
  kind: 'ttt',
  x: { quantity: 'temperature', unit: 'K' },
  y: { quantity: 'time', unit: 's' },
  series: names.map((name) => ({ name, x: [1], y: [2], lower: [1], upper: [3] })),
});

test('curves part by event, and by method of forecast', () => {
  const both = curves(['event 1, shared_law, conversion 0.5', 'event 2, model_free, conversion 0.5', 'melting']);
  expect(curvesByEvent(both).map(({ event, series }) => [event, series.map((s) => s.rest)])).toEqual([
    [1, ['shared_law, conversion 0.5', 'melting']],
    [2, ['model_free, conversion 0.5', 'melting']],
  ]);
  const [first] = splitCurves(curves(['event 1, shared_law, conversion 0.5', 'event 1, model_free, conversion 0.01']));
  expect(first.names).toEqual(['shared law']);
  expect(first.curves.series.map((s) => s.name)).toEqual(['α = 0.5']);
});

test('a diagram of heating has both axes in the chosen units, and is heavy where it was measured', () => {
  const heating: Curves = {
    kind: 'constant_heating',
    x: { quantity: 'heating rate', unit: 'K/s' },
    y: { quantity: 'temperature', unit: 'K' },
    series: [{ name: 'α = 0.5', x: [0.001, 0.1, 1, 10], y: [400, 420, 440, 460], beyond_measured_K: [9, 0, 0, 11] }],
  };
  const layout = layoutCurvePlot(heating, 600, { temperature: '°C', rate: 'K/min' });
  expect([layout.xLabel, layout.yLabel]).toEqual(['Heating rate, K/min', 'Temperature, °C']);
  // 60 K/min are 1 K/s, 160 °C are 433.15 K.
  expect(layout.x.ticks.find(({ label }) => label === '10')?.at).toBeCloseTo(layout.x.at(1 / 6), 6);
  expect(layout.y.ticks.find(({ label }) => label === '160')?.at).toBeCloseTo(layout.y.at(433.15), 6);
  const drawn = renderToString(h(CurvePlot, { layout, instruments: [] }));
  const [measured] = /class="law measured dash-0" d="([^"]+)"/.exec(drawn)?.slice(1) ?? [];
  expect(measured).toBe(linePath([0.1, 1], [420, 440], layout.x, layout.y));
  const { columns, rows } = curveRows(heating);
  expect(columns.at(-1)).toBe('beyond_measured [K]');
  expect(rows.map((row) => row['beyond_measured [K]'])).toEqual([9, 0, 0, 11]);
});

test('points of curves become rows with their units in the head', () => {
  const { columns, rows } = curveRows(curves(['event 1']));
  expect(columns).toEqual(['series', 'instrument', 'temperature [K]', 'time [s]', 'lower95', 'upper95']);
  expect(rows).toEqual([
    { series: 'event 1', instrument: null, 'temperature [K]': 1, 'time [s]': 2, lower95: 1, upper95: 3 },
  ]);
});

test('a hold is drawn over time, apart from the scans, and its file keeps both', () => {
  const axes = { x: { quantity: 'temperature', unit: 'K' }, y: { quantity: 'heat flow', unit: 'W' } };
  const trace = (name: string, x: number[], more = {}) => ({
    name,
    instrument: 'a',
    scan_id: name,
    unit: 'W/kg',
    x,
    y: [0, 1, 0],
    ...more,
  });
  const series = [trace('ramp', [300, 400, 500]), trace('hold', [419, 420, 421], { time_s: [0, 900, 1800] })];
  const thermogram: Curves = { kind: 'thermogram', ...axes, series };
  const { scans, holds } = partLanes(buildLanes(thermogram, { kind: 'baseline', ...axes, series: [] }, []));
  expect(scans.map(({ file, trace: { x } }) => [file, x])).toEqual([['ramp', [300, 400, 500]]]);
  expect(holds.map(({ file, holdK, trace: { x } }) => [file, holdK, x])).toEqual([['hold', 420, [0, 900, 1800]]]);
  const units = { temperature: '°C', rate: 'K/min' } as const;
  const layout = layoutLanes(holds, 600, units);
  expect(layout.xLabel).toBe('Time from the start of the hold, min');
  expect(layout.x.ticks.map(({ label }) => label)).toContain('30');
  expect(layoutLanes(scans, 600, units).xLabel).toBe('Temperature, °C');
  const { columns, rows } = curveRows(thermogram);
  expect(columns.slice(-2)).toEqual(['unit', 'time [s]']);
  expect(rows[4]).toMatchObject({ series: 'hold', unit: 'W/kg', 'time [s]': 900, 'temperature [K]': 420 });
});

test('holds of different lengths share a logarithmic axis, each with the same share of it in front of its end', () => {
  const times = (endS: number): number[] => Array.from({ length: 200 }, (_, i) => (endS * (i + 1)) / 200);
  const trace = (name: string, endS: number) => ({
    name,
    instrument: 'furnace',
    scan_id: name,
    x: times(endS).map(() => 400),
    y: times(endS).map((t) => t / endS),
    time_s: times(endS),
  });
  const axes = { x: { quantity: 'temperature', unit: 'K' }, y: { quantity: 'heat flow', unit: 'W' } };
  const thermogram: Curves = { kind: 'thermogram', ...axes, series: [trace('short', 100), trace('long', 10_000)] };
  const { holds } = partLanes(buildLanes(thermogram, { ...thermogram, kind: 'baseline', series: [] }, []));
  const { x, xLabel, placed } = layoutLanes(holds, 600, { temperature: '°C', rate: 'K/min' });
  expect(xLabel).toBe('Time from the start of the hold, min, logarithmic');
  expect(x.at(100) - x.at(10)).toBeCloseTo(x.at(10_000) - x.at(1000), 9);
  // What is left of the axis is left out of the curves too.
  for (const { path } of placed) expect(Number(/^M([\d.]+)/.exec(path)?.[1])).toBeGreaterThanOrEqual(x.range[0]);
  const { conversion, holdConversion } = partConversion({
    ...thermogram,
    kind: 'conversion',
    series: [trace('hold', 100), { name: 'ramp', x: [400, 410], y: [0, 1] }],
  });
  expect(conversion.series.map(({ name }) => name)).toEqual(['ramp']);
  expect(holdConversion.x).toEqual({ quantity: 'time', unit: 's' });
  expect(holdConversion.series.map(({ name, x: [first] }) => [name, first])).toEqual([['hold', 0.5]]);
});

// RFC 4180, section 2: quoted fields may hold commas, line breaks and doubled quotes.
test('CSV becomes cells parted by tabs', () => {
  expect(tabsFromCsv('a,"b, ""c""",d\n1,"two\nlines",3\n')).toBe('a\tb, "c"\td\n1\ttwo lines\t3\n');
});

test('addresses name what they show, whatever is in the names', () => {
  expect(parseRoute('/')).toEqual({ view: 'campaigns' });
  expect(parseRoute('/campaigns/c_1/')).toEqual({ view: 'campaign', id: 'c_1' });
  const odd = 'glass/№ 7 %';
  expect(parseRoute(samplePath('c_1', odd))).toEqual({ view: 'sample', id: 'c_1', sample: odd });
  expect(parseRoute('/campaigns/c_1/jobs')).toEqual({ view: 'jobs', id: 'c_1' });
  expect(parseRoute('/campaigns/%E0%A4%A/jobs')).toEqual({ view: 'none' });
  expect(parseRoute('/elsewhere')).toEqual({ view: 'none' });
});

// A year of 365.25 days has 31 557 600 s (IAU).
test('times are told in a unit that fits them', () => {
  expect(formatTime(31_557_600 * 5)).toBe('5\u00a0a');
  expect(formatTime(86_400)).toBe('24\u00a0h');
  expect(formatTime(90)).toBe('90\u00a0s');
  expect(formatTime(0.0031)).toBe('3.1\u00a0ms');
});

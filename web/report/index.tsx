import type { VNode } from 'preact';
import { renderToString } from 'preact-render-to-string';
import type { Units } from '../format.ts';
import { buildLedger, instrumentNames, rowsBySample } from '../model/ledger.ts';
import type { ReportData, ReportSample, SampleCurves } from './data.ts';
import { ReportEnd, ReportHead, SampleSection, type SampleTables } from './report.tsx';
import { REPORT_STYLE } from './style.ts';

export type { ReportData, ReportProvenance, ReportSample, SampleCurves } from './data.ts';
export { FIGURED_SAMPLES, figuredSamples } from './figured.ts';

const escapeText = (text: string): string => text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;');
const render = (part: VNode): string => `${renderToString(part)}\n`;

/**
 * One page of HTML that holds all of a campaign: it loads nothing, runs nothing, and prints. The same data give the same bytes.
 * It comes in pieces, a sample at a time, so that the curves of one sample at most are in memory.
 * Temperatures and rates are shown in `units`; every number stands there in the digits that its interval supports, the CSV files have
 * them all.
 * @param figured names of the samples told with their figures @param loadCurves is asked for the curves of each of these in turn, and
 * gets the sample's own rows
 */
export async function* renderReport(
  data: ReportData,
  figured: ReadonlySet<string>,
  loadCurves: (sample: ReportSample, tables: SampleTables) => Promise<SampleCurves> | SampleCurves,
  units: Units = { temperature: '°C', rate: 'K/min' },
): AsyncGenerator<string, void, undefined> {
  const { samples, tables } = data;
  const rows = buildLedger(tables, { samples: [...samples] });
  const instruments = instrumentNames(
    rows,
    tables.instruments.map((row) => row.instrument),
  );
  const shared = { data, rows, instruments, units };
  yield `<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escapeText(`Crystallisation kinetics: ${data.campaign}`)}</title>
<style>
${REPORT_STYLE}</style>
</head>
<body>
<main>
`;
  yield render(<ReportHead {...shared} figured={samples.filter(({ sample }) => figured.has(sample)).length} />);
  const scans = rowsBySample(tables.scans);
  const parameters = rowsBySample(tables.parameters);
  const verdicts = rowsBySample(tables.verdicts ?? []);
  const forecasts = rowsBySample(tables.forecasts ?? []);
  const numbers = new Map(rows.filter((row) => row.role === 'sample').map((row) => [row.sample, row.numbers]));
  for (const sample of samples) {
    const { sample: name } = sample;
    const own: SampleTables = {
      scans: scans.get(name) ?? [],
      parameters: parameters.get(name) ?? [],
      verdicts: verdicts.get(name) ?? [],
      forecasts: forecasts.get(name) ?? [],
    };
    yield render(
      <SampleSection
        sample={sample}
        tables={own}
        numbers={numbers.get(name) ?? []}
        curves={figured.has(name) ? await loadCurves(sample, own) : undefined}
        instruments={instruments}
        units={units}
      />,
    );
  }
  yield render(<ReportEnd {...shared} />);
  yield '</main>\n</body>\n</html>\n';
}

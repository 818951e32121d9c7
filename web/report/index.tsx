import { renderToString } from 'preact-render-to-string';
import type { Units } from '../format.ts';
import { buildLedger, instrumentNames } from '../model/ledger.ts';
import type { ReportData } from './data.ts';
import { Report } from './report.tsx';
import { REPORT_STYLE } from './style.ts';

export type { ReportData, ReportProvenance, ReportSample } from './data.ts';

const escapeText = (text: string): string => text.replace(/&/g, '&amp;').replace(/</g, '&lt;').replace(/>/g, '&gt;');

/**
 * One page of HTML that holds all of a campaign: it loads nothing, runs nothing, and prints. The same data give the same bytes.
 * Temperatures and rates are shown in `units`; every number stands there in the digits that its interval supports, the CSV files have
 * them all.
 */
export function renderReport(data: ReportData, units: Units = { temperature: '°C', rate: 'K/min' }): string {
  const rows = buildLedger(data.tables, { samples: [...data.samples] });
  const instruments = instrumentNames(
    rows,
    data.tables.instruments.map((row) => row.instrument),
  );
  const body = renderToString(<Report data={data} rows={rows} instruments={instruments} units={units} />);
  return `<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta name="viewport" content="width=device-width, initial-scale=1">
<title>${escapeText(`Crystallisation kinetics: ${data.campaign}`)}</title>
<style>
${REPORT_STYLE}</style>
</head>
<body>
${body}
</body>
</html>
`;
}

import type { ComponentChildren } from 'preact';
import type { AdviceRow, ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import type { InstrumentRow, ScanRow } from '../client/rows.ts';
import {
  formatEstimate,
  formatFixed,
  formatRate,
  formatSignificant,
  formatTemperature,
  type Units,
} from '../format.ts';
import { SOURCE_NAMES, withError } from '../model/correction.ts';
import { describeForecast } from '../model/forecast-words.ts';
import { flagMeaning, methodName, methodRank, SCAN_STATE_NAMES } from '../words.ts';

/** A table of any cells: the first of each row names it. */
export function ReportTable(props: {
  caption: string;
  heads: readonly string[];
  rows: readonly (readonly ComponentChildren[])[];
  /** The last column holds sentences: the others leave it room */
  hasWords?: boolean;
}) {
  const { caption, heads, rows, hasWords } = props;
  return (
    <div class="table-box">
      <table class={hasWords ? 'with-words' : undefined}>
        <caption>{caption}</caption>
        <thead>
          <tr>
            {heads.map((head) => (
              <th key={head} scope="col">
                {head}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map(([name, ...cells], i) => (
            <tr key={i}>
              <th scope="row">{name}</th>
              {cells.map((cell, k) => (
                <td key={k} class={k < heads.length - (hasWords ? 3 : 2) ? 'number' : undefined}>
                  {cell}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

export function InstrumentReport({
  rows,
  instruments,
}: {
  rows: readonly InstrumentRow[];
  instruments: readonly string[];
}) {
  return (
    <ReportTable
      caption="Instruments: what is taken off their temperatures, with 95 % intervals."
      heads={['Instrument', 'Kind', 'Offset', 'Lag', 'Smearing part', 'Standards', 'Taken from']}
      rows={rows.map((row) => [
        <span key="name">
          <InstrumentKey instrument={instruments.indexOf(row.instrument)} /> {row.instrument}
        </span>,
        row.kind,
        withError(row.offset_K, row.offset_se_K, 'K'),
        withError(row.lag_s, row.lag_se_s, 's'),
        withError(row.response_time_s, null, 's'),
        row.standards,
        SOURCE_NAMES[row.source],
      ])}
    />
  );
}

export function ScanReport({ rows, units }: { rows: readonly ScanRow[]; units: Units }) {
  const temperature = (value: number | null): string => (value === null ? '' : formatTemperature(value, units));
  const rate = (row: ScanRow): number => row.rate_K_per_s ?? row.rate_nominal_K_per_s ?? 0;
  const sorted = [...rows].sort((a, b) => Math.abs(rate(a)) - Math.abs(rate(b)) || (a.file < b.file ? -1 : 1));
  return (
    <ReportTable
      hasWords
      caption="Scans, slowest first: one row a scan and event."
      heads={['Rate', 'Instrument', 'Mass', 'Glass transition', 'Onset', 'Peak', 'Enthalpy', 'File, state and flags']}
      rows={sorted.map((row) => [
        row.rate_K_per_s === 0 ? 'hold' : rate(row) === 0 ? 'not known' : formatRate(rate(row), units),
        row.instrument,
        row.mass_mg === null ? '' : `${formatSignificant(row.mass_mg)}\u00a0mg`,
        temperature(row.glass_transition_K),
        temperature(row.onset_K),
        temperature(row.peak_K),
        row.enthalpy_J_per_g === null ? '' : `${formatSignificant(row.enthalpy_J_per_g)}\u00a0J/g`,
        <span key="words">
          <span class="file">{row.file.split('/').at(-1)}</span>
          {row.status !== 'reduced' && `, ${SCAN_STATE_NAMES[row.status]}`}
          {row.reason && `: ${row.reason}`}
          {row.flags.length > 0 && `; ${row.flags.map(flagMeaning).join('; ')}`}
        </span>,
      ])}
    />
  );
}

/** E at each conversion by each method, one event. */
export function EnergyReport({ rows }: { rows: readonly ParameterRow[] }) {
  const own = rows.filter(
    (row) =>
      row.quantity === 'activation_energy' &&
      row.conversion !== null &&
      row.variant === '' &&
      row.interval === 'monte_carlo',
  );
  if (own.length === 0) return null;
  const methods = [...new Set(own.map((row) => row.method))].sort((a, b) => methodRank(a) - methodRank(b));
  const conversions = [...new Set(own.map((row) => row.conversion as number))].sort((a, b) => a - b);
  const cell = (conversion: number, method: string): string => {
    const row = own.find((r) => r.conversion === conversion && r.method === method);
    if (!row) return '';
    const { value, spread } = formatEstimate(row.value, row.lower95, row.upper95);
    return `${value} ${spread}`;
  };
  return (
    <ReportTable
      caption="Activation energy at equal conversion, kJ/mol, with 95 % intervals."
      heads={['α', ...methods.map((method) => methodName(method)), '']}
      rows={conversions.map((conversion) => [
        formatFixed(conversion, 2),
        ...methods.map((method) => cell(conversion, method)),
        '',
      ])}
    />
  );
}

export function ForecastReport({ rows, units }: { rows: readonly ForecastRow[]; units: Units }) {
  return (
    <ReportTable
      hasWords
      caption="Forecasts with 95 % bands; in words, the pessimistic end comes first."
      heads={['Question', 'Answer', '95 % band', 'Method', 'In words, with doubts']}
      rows={rows.map((row) => {
        const { question, answer, band, method, words } = describeForecast(row, units);
        return [question, answer, band, method, words];
      })}
    />
  );
}

export function AdviceReport({ rows, units }: { rows: readonly AdviceRow[]; units: Units }) {
  return (
    <ReportTable
      hasWords
      caption="Scans that would narrow an interval most."
      heads={['Sample', 'Instrument', 'Rate', 'Interval now', 'Expected', 'Why']}
      rows={rows.map((row) => [
        row.sample,
        row.instrument,
        formatRate(row.rate_K_per_s, units),
        `${formatSignificant(row.interval_now)} ${row.unit === '1' ? '' : row.unit}`,
        `${formatSignificant(row.interval_expected)} ${row.unit === '1' ? '' : row.unit}`,
        row.sentence,
      ])}
    />
  );
}

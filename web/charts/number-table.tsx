import { FLAG_CODES, type FlagCode } from '../../schema/wire/flags.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { formatRate, formatTemperature, type Units } from '../format.ts';
import { describeEstimate } from '../model/describe.ts';
import type { EventNumbers } from '../model/headline.ts';
import { flagMeaning, QUANTITIES, sentence } from '../words.ts';
import { createIntervalScale, IntervalAxis, IntervalMark } from './interval-plot.tsx';

/** The numbers of one event by method, each with its 95 % interval drawn on a scale shared by the methods. */
export function EventTable(props: {
  sample: string;
  /** The sample has no other event */
  isOnly: boolean;
  numbers: EventNumbers;
  /** Width of the interval plots, px; 0 leaves them out */
  plotWidth: number;
  units: Units;
}) {
  const { sample, isOnly, numbers, plotWidth, units } = props;
  const any = numbers.energies[0] ?? numbers.exponents[0] ?? numbers.rows[0];
  return (
    <table class="event-numbers">
      <caption>
        <strong>{sample}</strong>
        {!isOnly && <span>event {numbers.event}</span>}
        {any && (
          <span>
            {any.scan_count} scans, {formatRate(any.rate_min_K_per_s, units)} to{' '}
            {formatRate(any.rate_max_K_per_s, units)}
          </span>
        )}
      </caption>
      {QUANTITIES.map(({ quantity, title, unit }) => (
        <Quantity
          key={quantity}
          title={title}
          unit={unit}
          rows={numbers.rows.filter((row) => row.quantity === quantity)}
          plotWidth={plotWidth}
          units={units}
        />
      ))}
    </table>
  );
}

function Quantity(props: {
  title: string;
  unit: string;
  rows: readonly ParameterRow[];
  plotWidth: number;
  units: Units;
}) {
  const { title, unit, rows, plotWidth, units } = props;
  if (rows.length === 0) return null;
  const scale = rows.length > 1 && plotWidth > 0 ? createIntervalScale(rows, plotWidth) : undefined;
  return (
    <tbody>
      <tr>
        <th colSpan={3} scope="rowgroup">
          {title}
          {unit && <span class="unit"> {unit}</span>}
        </th>
      </tr>
      {rows.map((row) => {
        const { value, spread, method } = describeEstimate(row);
        return (
          <tr key={`${row.method} ${row.variant} ${row.temperature_K}`}>
            <th scope="row">
              {method}
              {row.temperature_K !== null && `, at ${formatTemperature(row.temperature_K, units)}`}
            </th>
            <td class="plot">
              {scale && <IntervalMark scale={scale} value={row.value} lower95={row.lower95} upper95={row.upper95} />}
            </td>
            <td class="number">
              {value} <span class="spread">{spread}</span>
              <Concern flags={row.flags} />
            </td>
          </tr>
        );
      })}
      {scale && (
        <tr>
          <td />
          <td class="plot">
            <IntervalAxis scale={scale} />
          </td>
          <td />
        </tr>
      )}
    </tbody>
  );
}

/** A sign beside a number that its own flags put in doubt. */
function Concern({ flags }: { flags: readonly FlagCode[] }) {
  const meanings = flags.filter((code) => FLAG_CODES[code]?.[0] !== 'note').map(flagMeaning);
  if (meanings.length === 0) return null;
  const words = meanings.join('; ');
  return (
    <span class="concern tone-warn" title={sentence(words)}>
      <span aria-hidden="true">●</span>
      <span class="unseen">, flagged: {words}</span>
    </span>
  );
}

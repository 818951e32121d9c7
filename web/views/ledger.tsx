import { useComputed, useSignal } from '@preact/signals';
import { useCallback, useMemo, useRef } from 'preact/hooks';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import { RateAxis } from '../charts/rate-axis.tsx';
import { createRateScale } from '../charts/rate-scale.ts';
import { AdvisedMark } from '../charts/rate-strip.tsx';
import type { Campaign, ScanRow } from '../client/rows.ts';
import { formatCount } from '../format.ts';
import type { ActiveMark, LedgerRow } from '../model/ledger.ts';
import { isPrinting } from '../state/printing.ts';
import { units } from '../state/units.ts';
import { Downloads } from './download.tsx';
import { LedgerEntry } from './ledger-entry.tsx';
import { Readout } from './readout.tsx';
import { useWidth } from './use-width.ts';

const NOTHING: readonly LedgerRow[] = [];

/** Lowest and highest heating rate, K/s, and null when a scan has none: all that the axis depends on. */
function rateReach(rows: readonly LedgerRow[]): (number | null)[] {
  let low = Number.POSITIVE_INFINITY;
  let high = 0;
  let isRated = true;
  for (const row of rows)
    for (const rateKPerS of [
      ...row.marks.map((mark) => mark.rateKPerS),
      ...(row.advisedKPerS ? [row.advisedKPerS] : []),
    ]) {
      if (rateKPerS === null) isRated = false;
      else {
        low = Math.min(low, rateKPerS);
        high = Math.max(high, rateKPerS);
      }
    }
  return [...(high > 0 ? [low, high] : []), ...(isRated ? [] : [null])];
}

/** The coverage map: samples down, heating rate across, one mark a scan; beside it the fit and its headline numbers. */
export function Ledger(props: {
  campaign: Campaign;
  rows: readonly LedgerRow[];
  instruments: readonly string[];
  unassigned: readonly ScanRow[];
}) {
  const { campaign, rows, instruments, unassigned } = props;
  const active = useSignal<ActiveMark | undefined>(undefined);
  /** The one strip in the tab order */
  const tabRow = useSignal(0);
  /** Nothing is drawn before the width is known */
  const [axis, width] = useWidth<HTMLDivElement>();
  const reach = useMemo(() => rateReach(rows), [rows]);
  const scale = useMemo(() => createRateScale(reach, width, units.value), [reach.join(), width, units.value]);
  const drawn = width > 0 ? rows : NOTHING;
  const activeMark = useComputed(() => {
    const at = active.value;
    const row = at && rows[at.row];
    return row?.marks[at?.mark ?? -1] ? { sample: row.sample, mark: row.marks[at?.mark ?? 0] } : undefined;
  });

  const moveTo = (row: number, mark: number): void => {
    active.value = { row, mark };
    tabRow.value = row;
    const focus = (): boolean => {
      const strip = document.getElementById(`strip-${row}`);
      strip?.focus();
      return strip !== null;
    };
    // A row out of reach of the window is drawn first.
    if (!focus()) requestAnimationFrame(focus);
  };
  const pressKey = (row: number, event: KeyboardEvent): void => {
    const count = rows[row].marks.length;
    const mark = active.value?.row === row ? active.value.mark : 0;
    if (event.key === 'ArrowRight') moveTo(row, Math.min(count - 1, mark + 1));
    else if (event.key === 'ArrowLeft') moveTo(row, Math.max(0, mark - 1));
    else if (event.key === 'Home') moveTo(row, 0);
    else if (event.key === 'End') moveTo(row, count - 1);
    else if (event.key === 'ArrowDown' || event.key === 'ArrowUp') {
      const step = event.key === 'ArrowDown' ? 1 : -1;
      let to = row + step;
      while (rows[to] && rows[to].marks.length === 0) to += step;
      if (rows[to]) {
        const x = scale.x(rows[row].marks[mark].rateKPerS);
        const distances = rows[to].marks.map(({ rateKPerS }) => Math.abs(scale.x(rateKPerS) - x));
        moveTo(to, distances.indexOf(Math.min(...distances)));
      }
    } else if (event.key === 'Escape') active.value = undefined;
    else return;
    event.preventDefault();
  };

  // Drawn rows keep one handler, whatever data has come since.
  const keys = useRef(pressKey);
  keys.current = pressKey;
  const onKeyDown = useCallback((row: number, event: KeyboardEvent) => keys.current(row, event), []);

  return (
    <section class="coverage" aria-labelledby="coverage-title">
      <div class="section-head">
        <h2 id="coverage-title">Coverage</h2>
        <Downloads campaign={campaign} tables={['scans', 'coverage', 'conversion']} />
      </div>
      <Legend instruments={instruments} rows={rows} />
      <div class="ledger">
        <div class="ledger-axis">
          <span>Sample</span>
          <div ref={axis}>
            <p class="axis-title">
              Heating rate, {scale.unit}
              <span class="unseen">, logarithmic. Use the arrow keys to move from scan to scan.</span>
            </p>
            {width > 0 && <RateAxis scale={scale} />}
          </div>
          <span>
            Activation energy <i>E</i>
          </span>
          <span>
            Exponent <i>n</i>
          </span>
        </div>
        <ul class="ledger-rows">
          {drawn.map((row, i) => (
            <LedgerEntry
              key={`${row.role} ${row.sample}`}
              campaignId={campaign.id}
              row={row}
              index={i}
              scale={scale}
              instruments={instruments}
              active={active}
              tabRow={tabRow}
              onKeyDown={onKeyDown}
            />
          ))}
        </ul>
        <Readout active={activeMark} instruments={instruments} rows={rows} />
      </div>
      {unassigned.length > 0 && (
        <details class="unassigned" open={isPrinting.value || undefined}>
          <summary>{formatCount(unassigned.length, 'file')} without a sample</summary>
          <p>
            No row of scans.csv and no folder of the form SAMPLE/INSTRUMENT names the sample. Add a row for each and
            send the sheet again.
          </p>
          <ul>
            {unassigned.map((scan) => (
              <li key={scan.file} class="file">
                {scan.file}
              </li>
            ))}
          </ul>
        </details>
      )}
      <p class="small">
        <i>E</i> and <i>n</i> with their 95 % intervals. Every other method and interval is listed under “Numbers”.
      </p>
    </section>
  );
}

function Legend({ instruments, rows }: { instruments: readonly string[]; rows: readonly LedgerRow[] }) {
  const looks = new Set(rows.flatMap((row) => row.marks.map((mark) => mark.look)));
  const isFlagged = rows.some((row) => row.marks.some((mark) => mark.concern));
  return (
    <ul class="legend" aria-label="Marks">
      {instruments.map((name, i) => (
        <li key={name}>
          <InstrumentKey instrument={i} />
          {name}
        </li>
      ))}
      <li class="legend-break" aria-hidden="true" />
      {looks.has('hollow') && (
        <li class="muted-key">
          <InstrumentKey instrument={0} look="hollow" />
          waiting
        </li>
      )}
      {looks.has('struck') && (
        <li class="muted-key">
          <InstrumentKey instrument={0} look="struck" />
          set aside
        </li>
      )}
      {rows.some((row) => row.advisedKPerS !== undefined) && (
        <li>
          <svg class="key" width="22" height="22" viewBox="-11 -11 22 22" aria-hidden="true">
            <AdvisedMark x={0} y={0} />
          </svg>
          advised next
        </li>
      )}
      {isFlagged && (
        <li class="muted-key">
          <svg class="key" width="18" height="18" viewBox="-9 -9 18 18" aria-hidden="true">
            <circle class="mark-concern tone-warn" r="4" />
          </svg>
          flagged
        </li>
      )}
    </ul>
  );
}

import { type Signal, useComputed, useSignal } from '@preact/signals';
import { useLayoutEffect, useMemo, useRef } from 'preact/hooks';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { EnergySpark } from '../charts/energy-spark.tsx';
import type { RateScale } from '../charts/rate-scale.ts';
import { RateRuling, StripGround, StripMarks } from '../charts/rate-strip.tsx';
import { StateGlyph } from '../charts/state-glyph.tsx';
import { layoutStrip, nearestMark, type StripLayout } from '../charts/strip-layout.ts';
import { describeEstimate, describeMark } from '../model/describe.ts';
import { type EventEnergies, headlineEnergy, headlineExponent } from '../model/headline.ts';
import type { ActiveMark, LedgerRow } from '../model/ledger.ts';
import { samplePath } from '../routes.ts';
import { units } from '../state/units.ts';
import { gapName, SAMPLE_STATE_NAMES, sentence, verdictName } from '../words.ts';
import { changeSoon, useNear } from './use-near.ts';

/** Rows that are drawn without looking whether they are in the window. */
const FIRST_ROWS = 5;

interface EntryProps {
  campaignId: string;
  row: LedgerRow;
  index: number;
  scale: RateScale;
  instruments: readonly string[];
  active: Signal<ActiveMark | undefined>;
  tabRow: Signal<number>;
  onKeyDown(row: number, event: KeyboardEvent): void;
}

/**
 * One sample of the coverage map; out of reach of the window its name only. New data is drawn a few rows a frame too: while a
 * campaign is worked on, it comes every second.
 */
export function LedgerEntry(props: EntryProps) {
  const { campaignId, row, index, scale, instruments, tabRow } = props;
  const item = useRef<HTMLLIElement>(null);
  const { isNear, height } = useNear(item, index < FIRST_ROWS);
  const isDrawn = useComputed(() => isNear.value || tabRow.value === index);
  const shown = useSignal(row);
  useLayoutEffect(() => {
    if (!isDrawn.value || !item.current) shown.value = row;
    else if (shown.value !== row)
      changeSoon(item.current, () => {
        shown.value = row;
      });
  }, [row]);
  const drawing = useMemo(
    () => (isDrawn.value ? <DrawnEntry {...props} row={shown.value} /> : undefined),
    [isDrawn.value, shown.value, campaignId, index, scale, instruments],
  );
  return isDrawn.value ? (
    <li class={index < FIRST_ROWS ? 'entry is-first' : 'entry'} ref={item}>
      {drawing}
    </li>
  ) : (
    <li class="entry is-far" ref={item} style={height.value > 0 ? { minHeight: `${height.value}px` } : undefined}>
      <div class="entry-sample">
        <SampleName campaignId={campaignId} row={row} />
      </div>
    </li>
  );
}

const SampleName = ({ campaignId, row }: { campaignId: string; row: LedgerRow }) => (
  <h3>{row.role === 'sample' ? <a href={samplePath(campaignId, row.sample)}>{row.sample}</a> : row.sample}</h3>
);

/** Name and state, strip of marks, headline numbers. */
function DrawnEntry(props: EntryProps) {
  const { campaignId, row, index, scale, instruments, active, tabRow, onKeyDown } = props;
  const layout = useMemo(() => layoutStrip(row.marks, scale), [row, scale]);
  const idPrefix = `mark-${index}`;
  const tabIndex = useComputed(() => (tabRow.value === index ? 0 : -1));
  const activeId = useComputed(() => {
    const at = active.value;
    return at?.row === index ? `${idPrefix}-${at.mark}` : undefined;
  });
  const pointAt = (event: PointerEvent): void => {
    const box = (event.currentTarget as Element).getBoundingClientRect();
    const nearest = nearestMark(layout, event.clientX - box.left, event.clientY - box.top);
    if (nearest) active.value = { row: index, mark: row.marks.indexOf(nearest.mark) };
  };
  return (
    <>
      <div class="entry-sample">
        <SampleName campaignId={campaignId} row={row} />
        {row.role !== 'sample' && <p class="entry-state">{row.role}</p>}
        {row.state && (
          <p class="entry-state">
            <StateGlyph state={row.state} />
            {SAMPLE_STATE_NAMES[row.state]}
          </p>
        )}
        {row.verdict && <p class="entry-verdict">{verdictName(row.verdict)}</p>}
        {row.reason && row.state !== 'fitted' && <p class="entry-reason">{row.reason}</p>}
        {row.concerns.map((concern) => (
          <p key={concern} class="entry-concern">
            {sentence(concern)}
          </p>
        ))}
        {row.gaps.length > 0 && (
          <p class="entry-gaps">Missing: {[...new Set(row.gaps.map((gap) => gapName(gap.code)))].join(', ')}</p>
        )}
      </div>
      <div class="entry-strip">
        <svg class="entry-ruling" width={scale.width} height="100%" aria-hidden="true">
          <RateRuling scale={scale} />
        </svg>
        <div
          id={`strip-${index}`}
          class="strip"
          role="listbox"
          aria-label={`Scans of ${row.sample}`}
          aria-activedescendant={activeId}
          tabIndex={tabIndex}
          onKeyDown={(event) => onKeyDown(index, event)}
          onFocus={() => {
            if (active.value?.row !== index && row.marks.length > 0) active.value = { row: index, mark: 0 };
          }}
          onPointerMove={pointAt}
          onPointerDown={pointAt}
        >
          <svg width={scale.width} height={layout.height} aria-hidden="true">
            <StripGround scale={scale} layout={layout} row={row} />
            <ActiveRing active={active} index={index} layout={layout} />
          </svg>
          <svg class="strip-marks" width={scale.width} height={layout.height} role="presentation">
            <StripMarks
              layout={layout}
              instruments={instruments}
              options={{ idPrefix, describe: (mark) => describeMark(mark, units.value) }}
            />
          </svg>
        </div>
      </div>
      <Headline rows={row.numbers.map(headlineEnergy)} name="E" unit="kJ/mol" energies={row.energies} />
      <Headline rows={row.numbers.map(headlineExponent)} name="n" unit="" />
    </>
  );
}

function ActiveRing(props: { active: Signal<ActiveMark | undefined>; index: number; layout: StripLayout }) {
  const { active, index, layout } = props;
  // Drawn again only when the ring comes to this row, moves in it or leaves it.
  const mark = useComputed(() => (active.value?.row === index ? active.value.mark : -1));
  const placed = layout.placed[mark.value];
  return placed ? <circle class="active-ring" cx={placed.x} cy={placed.y} r="11" /> : null;
}

/** One number an event, with its interval and method; a dash where there is none yet. */
function Headline(props: {
  rows: readonly (ParameterRow | undefined)[];
  name: string;
  unit: string;
  energies?: readonly EventEnergies[];
}) {
  const rows = props.rows.filter((row) => row !== undefined);
  return (
    <div class="entry-number">
      <span class="entry-number-name">
        <i>{props.name}</i>
      </span>
      {rows.length === 0 && <p class="no-number">–</p>}
      {rows.map((row) => {
        const { value, spread, method } = describeEstimate(row);
        const energies = props.energies?.find((e) => e.event === row.event);
        return (
          <p key={row.event}>
            <span class="number">
              {value} <span class="spread">{spread}</span> <span class="unit">{props.unit}</span>
            </span>
            <span class="number-method">
              {rows.length > 1 && `event ${row.event}, `}
              {method}
            </span>
            {energies && <EnergySpark series={energies} />}
          </p>
        );
      })}
    </div>
  );
}

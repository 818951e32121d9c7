import { type Signal, useComputed } from '@preact/signals';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import { EnergySpark } from '../charts/energy-spark.tsx';
import type { RateScale } from '../charts/rate-scale.ts';
import { RateRuling, StripGround, StripMarks } from '../charts/rate-strip.tsx';
import { StateGlyph } from '../charts/state-glyph.tsx';
import { nearestMark, type StripLayout } from '../charts/strip-layout.ts';
import { describeEstimate, describeMark } from '../model/describe.ts';
import { type EventEnergies, headlineEnergy, headlineExponent } from '../model/headline.ts';
import type { ActiveMark, LedgerRow } from '../model/ledger.ts';
import { samplePath } from '../routes.ts';
import { units } from '../state/units.ts';
import { gapName, SAMPLE_STATE_NAMES, sentence, verdictName } from '../words.ts';

/** One sample of the coverage map: name and state, strip of marks, headline numbers. */
export function LedgerEntry(props: {
  campaignId: string;
  row: LedgerRow;
  index: number;
  scale: RateScale;
  layout: StripLayout;
  instruments: readonly string[];
  active: Signal<ActiveMark | undefined>;
  tabRow: Signal<number>;
  onKeyDown(event: KeyboardEvent): void;
}) {
  const { campaignId, row, index, scale, layout, instruments, active, tabRow, onKeyDown } = props;
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
    <li class="entry">
      <div class="entry-sample">
        <h3>{row.role === 'sample' ? <a href={samplePath(campaignId, row.sample)}>{row.sample}</a> : row.sample}</h3>
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
          onKeyDown={onKeyDown}
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
              idPrefix={idPrefix}
              describe={(mark) => describeMark(mark, units.value)}
            />
          </svg>
        </div>
      </div>
      <Headline rows={row.numbers.map(headlineEnergy)} name="E" unit="kJ/mol" energies={row.energies} />
      <Headline rows={row.numbers.map(headlineExponent)} name="n" unit="" />
    </li>
  );
}

function ActiveRing(props: { active: Signal<ActiveMark | undefined>; index: number; layout: StripLayout }) {
  const at = props.active.value;
  const placed = at?.row === props.index ? props.layout.placed[at.mark] : undefined;
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

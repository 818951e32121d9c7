import { type Signal, useComputed } from '@preact/signals';
import { useMemo } from 'preact/hooks';
import { type LaneLayout, layoutLanes, ThermogramLanes } from '../charts/thermogram-lanes.tsx';
import { formatRate, formatTemperature } from '../format.ts';
import type { ScanLane } from '../model/curves.ts';
import { units } from '../state/units.ts';

/** The lanes of a sample, to point at and to choose from by pointer or arrow keys. */
export function Lanes(props: {
  /** Unique prefix of the element ids of the lanes */
  idPrefix: string;
  lanes: readonly ScanLane[];
  instruments: readonly string[];
  width: number;
  pointed: Signal<string | undefined>;
  chosen: Signal<string | undefined>;
}) {
  const { idPrefix, lanes, instruments, width, pointed, chosen } = props;
  const layout = useMemo(() => layoutLanes(lanes, width, units.value), [lanes, width, units.value]);
  const { box, laneHeight } = layout;
  const chooseAt = (event: PointerEvent | MouseEvent): string | undefined => {
    const bounds = (event.currentTarget as Element).getBoundingClientRect();
    const place = Math.floor((box.bottom - 4 - (event.clientY - bounds.top)) / laneHeight);
    return lanes[Math.max(0, Math.min(lanes.length - 1, place))]?.key;
  };
  const onKeyDown = (event: KeyboardEvent): void => {
    const place = lanes.findIndex((lane) => lane.key === (pointed.value ?? chosen.value));
    const steps: Record<string, number> = {
      ArrowUp: place + 1,
      ArrowDown: place - 1,
      Home: 0,
      End: lanes.length - 1,
    };
    if (event.key in steps) pointed.value = lanes[Math.max(0, Math.min(lanes.length - 1, steps[event.key]))]?.key;
    else if (event.key === 'Enter' || event.key === ' ') chosen.value = pointed.value ?? chosen.value;
    else return;
    event.preventDefault();
  };
  const activeId = useComputed(() => {
    const place = lanes.findIndex((lane) => lane.key === pointed.value);
    return place < 0 ? undefined : `${idPrefix}-${place}`;
  });
  const drawing = useMemo(
    () => <ThermogramLanes layout={layout} instruments={instruments} units={units.value} />,
    [layout, instruments, units.value],
  );
  return (
    <div
      class="lanes"
      role="listbox"
      tabIndex={0}
      aria-label={`${lanes[0]?.holdK === undefined ? 'Scans, slowest first' : 'Holds, coolest first'}. Arrow keys move, Enter shows one by itself.`}
      aria-activedescendant={activeId}
      onKeyDown={onKeyDown}
      onPointerMove={(event) => {
        pointed.value = chooseAt(event);
      }}
      onClick={(event) => {
        chosen.value = chooseAt(event);
      }}
    >
      <svg class="plot-svg" width={box.width} height={box.height} role="presentation">
        <LaneGround layout={layout} pointed={pointed} chosen={chosen} />
        {drawing}
      </svg>
      <div class="unseen">
        {lanes.map((lane, i) => (
          <div
            key={lane.key}
            id={`${idPrefix}-${i}`}
            role="option"
            tabIndex={-1}
            aria-selected={lane.key === chosen.value}
          >
            {describeLane(lane)}
          </div>
        ))}
      </div>
    </div>
  );
}

export function describeLane(lane: ScanLane): string {
  const peaks = lane.holdK === undefined ? lane.rows.filter((row) => row.peak_K !== null) : [];
  return [
    lane.holdK !== undefined
      ? `hold at ${formatTemperature(lane.holdK, units.value)}`
      : lane.rateKPerS === null
        ? 'no rate known'
        : `${formatRate(lane.rateKPerS, units.value)}${lane.isCooling ? ' cooling' : ''}`,
    lane.instrument,
    ...peaks.map((row) => `peak ${formatTemperature(row.peak_K as number, units.value)}`),
  ].join(', ');
}

/** Ground under the lane pointed at and the one chosen. */
function LaneGround(props: {
  layout: LaneLayout;
  pointed: Signal<string | undefined>;
  chosen: Signal<string | undefined>;
}) {
  const { box, laneHeight, placed } = props.layout;
  const ground = (key: string | undefined, name: string) => {
    const place = placed.find(({ lane }) => lane.key === key);
    return place ? (
      <rect data-passing class={name} x={0} width={box.right} y={place.middle - laneHeight / 2} height={laneHeight} />
    ) : null;
  };
  return (
    <>
      {ground(props.chosen.value, 'lane-chosen')}
      {ground(props.pointed.value, 'lane-pointed')}
    </>
  );
}

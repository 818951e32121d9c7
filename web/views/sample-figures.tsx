import { type Signal, useSignal } from '@preact/signals';
import { useMemo } from 'preact/hooks';
import { ConversionPlot, type CurveLayout, layoutConversion } from '../charts/conversion-plot.tsx';
import { linePath } from '../charts/curve-path.ts';
import { CorrectionKeys, CurvePlot, LawKeys, lawName, layoutCurvePlot } from '../charts/curve-plot.tsx';
import { EnergyPanels, layoutEnergy } from '../charts/energy-panels.tsx';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import { KissingerPlot, layoutKissinger } from '../charts/kissinger-plot.tsx';
import { eventLimits, layoutScanPlot, ScanPlot } from '../charts/scan-plot.tsx';
import { FIGURES } from '../model/captions.ts';
import {
  type CurveSeries,
  type Curves,
  curvesByEvent,
  partConversion,
  type ScanLane,
  splitCurves,
} from '../model/curves.ts';
import { units } from '../state/units.ts';
import { Figure } from './figure.tsx';
import { describeLane } from './lanes.tsx';
import { LimitHandles } from './limit-handles.tsx';

/** Names of the instruments of some curves with their marks. */
export function InstrumentKeys({ of, instruments }: { of: readonly CurveSeries[]; instruments: readonly string[] }) {
  const present = instruments.filter((name) => of.some((series) => series.instrument === name));
  return (
    <>
      {present.map((name) => (
        <li key={name}>
          <InstrumentKey instrument={instruments.indexOf(name)} />
          {name}
        </li>
      ))}
    </>
  );
}

interface FigureProps {
  curves: Curves;
  of: readonly string[];
  instruments: readonly string[];
}

export function ConversionFigures(props: FigureProps & { pointed: Signal<string | undefined> }) {
  const { curves, of, instruments, pointed } = props;
  const parts = useMemo(() => partConversion(curves), [curves]);
  return (
    <>
      {(['conversion', 'holdConversion'] as const).map(
        (kind) =>
          parts[kind].series.length > 0 && (
            <Figure
              key={kind}
              title={FIGURES[kind].title}
              of={of}
              curves={parts[kind]}
              caption={FIGURES[kind].caption}
              legend={<InstrumentKeys of={parts[kind].series} instruments={instruments} />}
              draw={(width) => (
                <ConversionDrawing
                  series={parts[kind].series}
                  width={width}
                  instruments={instruments}
                  pointed={pointed}
                />
              )}
            />
          ),
      )}
    </>
  );
}

/** How near to a curve the pointer must be, px. */
const REACH = 24;

function ConversionDrawing(props: {
  series: readonly CurveSeries[];
  width: number;
  instruments: readonly string[];
  pointed: Signal<string | undefined>;
}) {
  const { series, width, instruments, pointed } = props;
  const layout = useMemo(() => layoutConversion(series, width, units.value), [series, width, units.value]);
  const drawing = useMemo(() => <ConversionPlot layout={layout} instruments={instruments} />, [layout, instruments]);
  const pointAt = (event: PointerEvent): void => {
    const bounds = (event.currentTarget as Element).getBoundingClientRect();
    const px = event.clientX - bounds.left;
    const conversion = layout.y.valueAt(event.clientY - bounds.top);
    let distance = REACH;
    for (const { scan_id, x, y } of layout.series) {
      const place = y.findIndex((alpha) => alpha >= conversion);
      const d = place < 0 ? REACH : Math.abs(layout.x.at(x[place]) - px);
      if (d < distance) {
        distance = d;
        pointed.value = scan_id;
      }
    }
  };
  return (
    <svg
      class="plot-svg"
      width={layout.box.width}
      height={layout.box.height}
      role="img"
      aria-label={`Conversion against ${series[0]?.time_s ? 'time' : 'temperature'}, ${series.length} curves`}
      onPointerMove={pointAt}
    >
      {drawing}
      <PointedCurve layout={layout} pointed={pointed} />
    </svg>
  );
}

function PointedCurve({ layout, pointed }: { layout: CurveLayout; pointed: Signal<string | undefined> }) {
  if (pointed.value === undefined) return null;
  return (
    <g data-passing>
      {layout.series
        .filter((s) => s.scan_id === pointed.value)
        .map((s) => (
          <path key={s.name} class="curve-pointed" d={linePath(s.x, s.y, layout.x, layout.y)} />
        ))}
    </g>
  );
}

/** One plot an event: peaks of different events have nothing to share. */
export function KissingerFigures({ curves, of, instruments }: FigureProps) {
  const events = useMemo(() => curvesByEvent(curves), [curves]);
  const { title, caption } = FIGURES.kissinger;
  return (
    <>
      {events.map(({ event, series }) => {
        const name = events.length > 1 ? `${title}, event ${event}` : title;
        const { laws, isCorrected } = layoutKissinger(series, 600, units.value);
        return (
          <Figure
            key={event}
            title={name}
            of={of}
            curves={{ ...curves, series }}
            caption={caption}
            legend={
              <>
                <InstrumentKeys of={series} instruments={instruments} />
                {isCorrected && <CorrectionKeys />}
                <LawKeys names={laws.map(lawName)} />
              </>
            }
            draw={(width) => {
              const layout = layoutKissinger(series, width, units.value);
              return (
                <svg
                  class="plot-svg"
                  width={layout.box.width}
                  height={layout.box.height}
                  role="img"
                  aria-label={`Kissinger plot of ${layout.points.reduce((sum, s) => sum + s.x.length, 0)} peaks`}
                >
                  <KissingerPlot layout={layout} instruments={instruments} units={units.value} />
                </svg>
              );
            }}
          />
        );
      })}
    </>
  );
}

export function EnergyFigures({ curves, of }: Omit<FigureProps, 'instruments'>) {
  const events = useMemo(() => curvesByEvent(curves), [curves]);
  const { title, caption } = FIGURES.energy;
  return (
    <>
      {events.map(({ event, series }) => (
        <Figure
          key={event}
          title={events.length > 1 ? `${title}, event ${event}` : title}
          of={of}
          curves={{ ...curves, series }}
          caption={caption}
          draw={(width) => {
            const layout = layoutEnergy(series, width);
            return (
              <svg
                class="plot-svg"
                width={layout.width}
                height={layout.height}
                role="img"
                aria-label={`Activation energy against conversion by ${series.length} methods`}
              >
                <EnergyPanels layout={layout} />
              </svg>
            );
          }}
        />
      ))}
    </>
  );
}

/** Growth rate, viscosity, times of transformation: whatever else the server gives, a figure an event and method. */
export function OtherFigures({ curves, of, instruments }: FigureProps) {
  const { title, caption } = FIGURES[curves.kind as keyof typeof FIGURES];
  return (
    <>
      {splitCurves(curves).map((part) => {
        const name = [title, ...part.names].join(', ');
        return (
          <Figure
            key={name}
            title={name}
            of={of}
            curves={part.curves}
            caption={caption}
            legend={
              <>
                <InstrumentKeys of={part.curves.series} instruments={instruments} />
                <LawKeys names={part.curves.series.filter((s) => s.instrument === undefined).map((s) => s.name)} />
              </>
            }
            draw={(width) => {
              const layout = layoutCurvePlot(part.curves, width, units.value);
              return (
                <svg class="plot-svg" width={layout.box.width} height={layout.box.height} role="img" aria-label={name}>
                  <CurvePlot layout={layout} instruments={instruments} />
                </svg>
              );
            }}
          />
        );
      })}
    </>
  );
}

/** One scan by itself: heat flow with its axis, baseline, limits and what was found. */
export function ScanFigure(props: {
  lane: ScanLane;
  of: readonly string[];
  instruments: readonly string[];
  /** Limits of the event as moved by hand, K */
  moved: Signal<[number, number] | undefined>;
}) {
  const { lane, of, instruments, moved } = props;
  const limits = eventLimits(lane);
  const isZoomed = useSignal(false);
  const hasEvent = lane.baseline !== undefined;
  const isHold = lane.holdK !== undefined;
  return (
    <Figure
      title={describeLane(lane)}
      of={of}
      curves={{
        kind: 'thermogram',
        x: isHold ? { quantity: 'time', unit: 's' } : { quantity: 'temperature', unit: 'K' },
        y: { quantity: 'heat flow', unit: lane.trace.unit ?? '' },
        series: [lane.trace, ...(lane.baseline ? [{ ...lane.baseline, name: `baseline of ${lane.file}` }] : [])],
      }}
      caption={
        <>
          <span class="file">{lane.file}</span>
          {hasEvent && isHold
            ? '. Shaded: from limit to limit of the event.'
            : hasEvent
              ? '. Shaded: from limit to limit of the event; drag a limit, or move it with the arrow keys.'
              : '. No event was found.'}
        </>
      }
      tools={
        hasEvent && (
          <fieldset class="unit-choice figure-choice">
            <legend class="unseen">Part shown</legend>
            {[
              { name: 'whole scan', value: false },
              { name: 'event', value: true },
            ].map(({ name, value }) => (
              <label key={name}>
                <input
                  type="radio"
                  name="scan-part"
                  checked={isZoomed.value === value}
                  onChange={() => {
                    isZoomed.value = value;
                  }}
                />
                <span>{name}</span>
              </label>
            ))}
          </fieldset>
        )
      }
      draw={(width) => {
        const layout = layoutScanPlot(lane, width, units.value, isZoomed.value);
        return (
          <svg
            class="plot-svg"
            width={layout.box.width}
            height={layout.box.height}
            aria-label={`Heat flow of ${describeLane(lane)}`}
          >
            <ScanPlot
              lane={lane}
              layout={layout}
              instrument={instruments.indexOf(lane.instrument)}
              units={units.value}
            />
            {limits && !isHold && <LimitHandles layout={layout} standing={limits} moved={moved} />}
          </svg>
        );
      }}
    />
  );
}

import type { ComponentChildren } from 'preact';
import { ConversionPlot, layoutConversion } from '../charts/conversion-plot.tsx';
import { CorrectionKeys, CurvePlot, LawKeys, lawName, layoutCurvePlot } from '../charts/curve-plot.tsx';
import { EnergyPanels, layoutEnergy } from '../charts/energy-panels.tsx';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import { KissingerPlot, layoutKissinger } from '../charts/kissinger-plot.tsx';
import { extent } from '../charts/plot-scale.ts';
import { RateAxis } from '../charts/rate-axis.tsx';
import { createRateScale, type RateScale } from '../charts/rate-scale.ts';
import { RateRuling, StripGround, StripMarks } from '../charts/rate-strip.tsx';
import { layoutStrip, type StripLayout } from '../charts/strip-layout.ts';
import { layoutLanes, ThermogramLanes } from '../charts/thermogram-lanes.tsx';
import type { ScanRow } from '../client/rows.ts';
import type { Units } from '../format.ts';
import { FIGURES } from '../model/captions.ts';
import {
  buildLanes,
  type CurveSeries,
  curvesByEvent,
  OTHER_KINDS,
  partConversion,
  partLanes,
  splitCurves,
} from '../model/curves.ts';
import type { LedgerRow } from '../model/ledger.ts';
import type { SampleCurves } from './data.ts';

/** Width of every figure, px: the text column of the page and of A4 paper. */
const WIDTH = 680;
/** Room for a sample's name beside its strip, px, and the letters that fit in it. */
const NAME_WIDTH = 150;
const NAME_LETTERS = 22;

function ReportFigure(props: {
  title: string;
  caption: string;
  width?: number;
  height: number;
  legend?: ComponentChildren;
  children: ComponentChildren;
}) {
  const { title, caption, width = WIDTH, height, legend, children } = props;
  return (
    <figure>
      <svg width={width} height={height} viewBox={`0 0 ${width} ${height}`} role="img" aria-label={title}>
        {children}
      </svg>
      {legend && <ul class="legend">{legend}</ul>}
      <figcaption>
        <strong>{title}.</strong> {caption}
      </figcaption>
    </figure>
  );
}

export function InstrumentLegend({ names, instruments }: { names: readonly string[]; instruments: readonly string[] }) {
  return (
    <>
      {names.map((name) => (
        <li key={name}>
          <InstrumentKey instrument={instruments.indexOf(name)} /> {name}
        </li>
      ))}
    </>
  );
}

const instrumentsOf = (series: readonly CurveSeries[], instruments: readonly string[]): string[] =>
  instruments.filter((name) => series.some((s) => s.instrument === name));

/** No taller than a page of paper, px: a figure is not cut in print. */
const TALLEST = 860;
const AXIS_HEIGHT = 44;

interface Strip {
  row: LedgerRow;
  layout: StripLayout;
}

/** Every scan of the campaign: samples down, heating rate across, in as many figures as paper needs. */
export function CoverageFigures(props: { rows: readonly LedgerRow[]; instruments: readonly string[]; units: Units }) {
  const { rows, instruments, units } = props;
  const rates = [...new Set(rows.flatMap((row) => row.marks.map((mark) => mark.rateKPerS)))];
  const known = extent(rates.filter((rate) => rate !== null));
  const scale = createRateScale(rates.includes(null) ? [...known, null] : known, WIDTH - NAME_WIDTH, units);
  const figures: Strip[][] = [];
  let room = 0;
  for (const row of rows) {
    const layout = layoutStrip(row.marks, scale);
    if (layout.height > room) {
      figures.push([]);
      room = TALLEST - AXIS_HEIGHT;
    }
    figures.at(-1)?.push({ row, layout });
    room -= layout.height;
  }
  return (
    <>
      {figures.map((strips, i) => (
        <CoverageFigure
          key={i}
          title={figures.length === 1 ? 'Coverage' : `Coverage, part ${i + 1} of ${figures.length}`}
          strips={strips}
          scale={scale}
          instruments={instruments}
          units={units}
        />
      ))}
    </>
  );
}

function CoverageFigure(props: {
  title: string;
  strips: readonly Strip[];
  scale: RateScale;
  instruments: readonly string[];
  units: Units;
}) {
  const { title, scale, instruments, units } = props;
  let y = AXIS_HEIGHT;
  const strips = props.strips.map(({ row, layout }) => {
    const strip = { row, layout, y };
    y += layout.height;
    return strip;
  });
  const name = ({ sample, role }: LedgerRow): string => {
    const full = role === 'sample' ? sample : `${sample}, ${role}`;
    return full.length > NAME_LETTERS ? `${full.slice(0, NAME_LETTERS - 1)}…` : full;
  };
  return (
    <ReportFigure
      title={title}
      caption="One mark a scan at its heating rate; struck out: set aside; dashed: decades without a scan between two that have some."
      height={y + 4}
      legend={<InstrumentLegend names={instruments} instruments={instruments} />}
    >
      <text class="axis-name" x={NAME_WIDTH} y={13}>{`Heating rate, ${units.rate}`}</text>
      <svg x={NAME_WIDTH} y={18} width={scale.width} height={26} aria-hidden="true">
        <RateAxis scale={scale} />
      </svg>
      <svg x={NAME_WIDTH} y={AXIS_HEIGHT} width={scale.width} height={y - AXIS_HEIGHT} aria-hidden="true">
        <RateRuling scale={scale} />
      </svg>
      {strips.map(({ row, layout, y: top }) => (
        <g key={`${row.role} ${row.sample}`}>
          <path class="grid-decade" d={`M0 ${top}H${WIDTH}`} />
          <text class="panel-title" x={0} y={top + layout.railY + 4}>
            {name(row)}
          </text>
          <svg x={NAME_WIDTH} y={top} width={scale.width} height={layout.height} aria-hidden="true">
            <StripGround scale={scale} layout={layout} row={row} />
            <StripMarks layout={layout} instruments={instruments} />
          </svg>
        </g>
      ))}
    </ReportFigure>
  );
}

/** Every figure of one sample for which there are curves. */
export function SampleFigures(props: {
  curves: SampleCurves;
  scans: readonly ScanRow[];
  instruments: readonly string[];
  units: Units;
}) {
  const { curves: all, scans, instruments, units } = props;
  const { thermogram, baseline, conversion, kissinger, energy } = all;
  const lanes = thermogram && baseline ? buildLanes(thermogram, baseline, scans) : [];
  const parted = partLanes(lanes);
  const conversions = conversion && partConversion(conversion);
  const eventTitle = (title: string, event: number, of: number): string =>
    of > 1 ? `${title}, event ${event}` : title;
  return (
    <>
      {(['thermogram', 'hold'] as const).map((kind) => {
        const own = kind === 'hold' ? parted.holds : parted.scans;
        if (own.length === 0) return null;
        const layout = layoutLanes(own, WIDTH, units);
        const names = instrumentsOf(
          own.map((lane) => lane.trace),
          instruments,
        );
        return (
          <ReportFigure
            key={kind}
            {...FIGURES[kind]}
            height={layout.box.height}
            legend={<InstrumentLegend names={names} instruments={instruments} />}
          >
            <ThermogramLanes layout={layout} instruments={instruments} units={units} />
          </ReportFigure>
        );
      })}
      {(['conversion', 'holdConversion'] as const).map((kind) => {
        const series = conversions?.[kind].series ?? [];
        if (series.length === 0) return null;
        const layout = layoutConversion(series, WIDTH, units);
        return (
          <ReportFigure
            key={kind}
            {...FIGURES[kind]}
            height={layout.box.height}
            legend={<InstrumentLegend names={instrumentsOf(series, instruments)} instruments={instruments} />}
          >
            <ConversionPlot layout={layout} instruments={instruments} />
          </ReportFigure>
        );
      })}
      {kissinger &&
        kissinger.series.length > 0 &&
        curvesByEvent(kissinger).map(({ event, series }, _, events) => {
          const layout = layoutKissinger(series, WIDTH, units);
          const laws = layout.laws.map(lawName);
          return (
            <ReportFigure
              key={event}
              {...FIGURES.kissinger}
              title={eventTitle(FIGURES.kissinger.title, event, events.length)}
              height={layout.box.height}
              legend={
                <>
                  <InstrumentLegend names={instrumentsOf(series, instruments)} instruments={instruments} />
                  {layout.isCorrected && <CorrectionKeys />}
                  <LawKeys names={laws} />
                </>
              }
            >
              <KissingerPlot layout={layout} instruments={instruments} units={units} />
            </ReportFigure>
          );
        })}
      {energy &&
        energy.series.length > 0 &&
        curvesByEvent(energy).map(({ event, series }, _, events) => {
          const layout = layoutEnergy(series, WIDTH);
          return (
            <ReportFigure
              key={event}
              {...FIGURES.energy}
              title={eventTitle(FIGURES.energy.title, event, events.length)}
              height={layout.height}
            >
              <EnergyPanels layout={layout} />
            </ReportFigure>
          );
        })}
      {OTHER_KINDS.flatMap((kind) => {
        const curves = all[kind];
        if (!curves || curves.series.length === 0) return [];
        const { title, caption } = FIGURES[kind as keyof typeof FIGURES];
        return splitCurves(curves).map((part) => {
          const layout = layoutCurvePlot(part.curves, WIDTH, units);
          const name = [title, ...part.names].join(', ');
          return (
            <ReportFigure
              key={name}
              title={name}
              caption={caption}
              height={layout.box.height}
              legend={
                <>
                  <InstrumentLegend names={instrumentsOf(part.curves.series, instruments)} instruments={instruments} />
                  <LawKeys names={part.curves.series.filter((s) => s.instrument === undefined).map((s) => s.name)} />
                </>
              }
            >
              <CurvePlot layout={layout} instruments={instruments} />
            </ReportFigure>
          );
        });
      })}
    </>
  );
}

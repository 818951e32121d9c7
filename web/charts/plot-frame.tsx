import type { ComponentChildren } from 'preact';
import type { PlotScale } from './plot-scale.ts';

/** Inner edges of a plot in px within its figure. */
export interface PlotBox {
  width: number;
  height: number;
  left: number;
  right: number;
  top: number;
  bottom: number;
}

const DIGIT_WIDTH = 7;

/** Room for the labels of both axes: the quantity of y stands above the plot, that of x below it. */
export function createPlotBox(width: number, height: number, left = 48, top = 26): PlotBox {
  return { width, height, left, right: width - 10, top, bottom: height - 40 };
}

/** Width of the widest tick label, px. */
export const labelWidth = (scale: PlotScale): number =>
  Math.max(0, ...scale.ticks.map(({ label }) => label.length)) * DIGIT_WIDTH;

/** Ruling, tick labels and names of the axes; what is plotted goes inside. */
export function PlotFrame(props: {
  box: PlotBox;
  x: PlotScale;
  /** Missing where lanes stand in for an axis */
  y?: PlotScale;
  xLabel: string;
  yLabel?: string;
  /** A second scale along the upper edge, e.g. temperature over its reciprocal */
  over?: { scale: PlotScale; label: string };
  children?: ComponentChildren;
}) {
  const { box, x, y, xLabel, yLabel, over, children } = props;
  const inside = (at: number, [a, b]: [number, number]): boolean =>
    at >= Math.min(a, b) - 0.5 && at <= Math.max(a, b) + 0.5;
  const ticksX = x.ticks.filter(({ at }) => inside(at, x.range));
  const ticksY = y?.ticks.filter(({ at }) => inside(at, y.range)) ?? [];
  return (
    <>
      <path class="grid-step" d={ticksX.map(({ at }) => `M${at.toFixed(1)} ${box.top}V${box.bottom}`).join('')} />
      <path class="grid-step" d={ticksY.map(({ at }) => `M${box.left} ${at.toFixed(1)}H${box.right}`).join('')} />
      <path class="grid-decade" d={`M${box.left} ${box.bottom}H${box.right}`} />
      {ticksX.map(({ at, label }) => (
        <text key={label} class="axis-label" x={at.toFixed(1)} y={box.bottom + 15} text-anchor="middle">
          {label}
        </text>
      ))}
      {ticksY.map(({ at, label }) => (
        <text key={label} class="axis-label" x={box.left - 6} y={(at + 4).toFixed(1)} text-anchor="end">
          {label}
        </text>
      ))}
      <text class="axis-name" x={box.right} y={box.bottom + 33} text-anchor="end">
        {xLabel}
      </text>
      {yLabel && (
        <text class="axis-name" x={0} y={13}>
          {yLabel}
        </text>
      )}
      {over && (
        <>
          <path class="grid-decade" d={`M${box.left} ${box.top}H${box.right}`} />
          {over.scale.ticks
            .filter(({ at }) => inside(at, x.range))
            .map(({ at, label }) => (
              <g key={label}>
                <path class="grid-decade" d={`M${at.toFixed(1)} ${box.top}v-4`} />
                <text class="axis-label" x={at.toFixed(1)} y={box.top - 7} text-anchor="middle">
                  {label}
                </text>
              </g>
            ))}
          <text class="axis-name" x={box.right} y={13} text-anchor="end">
            {over.label}
          </text>
        </>
      )}
      {children}
    </>
  );
}

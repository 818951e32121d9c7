import type { Signal } from '@preact/signals';
import type { ScanPlotLayout } from '../charts/scan-plot.tsx';
import { formatTemperature } from '../format.ts';
import { units } from '../state/units.ts';

/** Steps of the arrow keys, K; with Shift ten of them. */
const STEP_K = 0.1;
/** The limits stay this far apart, K. */
const LEAST_WIDTH_K = 0.5;

/** Two handles at the limits of the event, to be dragged or moved with the arrow keys. */
export function LimitHandles(props: {
  layout: ScanPlotLayout;
  /** As found or corrected, K */
  standing: [number, number];
  /** As moved, K */
  moved: Signal<[number, number] | undefined>;
}) {
  const { layout, standing, moved } = props;
  const { box, x } = layout;
  const limits = moved.value ?? standing;
  const reach: [number, number] = [x.valueAt(box.left), x.valueAt(box.right)];
  const move = (side: 0 | 1, temperatureK: number): void => {
    const other = limits[1 - side];
    const [low, high] = side === 0 ? [reach[0], other - LEAST_WIDTH_K] : [other + LEAST_WIDTH_K, reach[1]];
    const placed = Math.round(Math.min(high, Math.max(low, temperatureK)) * 100) / 100;
    moved.value = side === 0 ? [placed, other] : [other, placed];
  };
  const onKeyDown = (side: 0 | 1) => (event: KeyboardEvent) => {
    const direction = { ArrowRight: 1, ArrowUp: 1, ArrowLeft: -1, ArrowDown: -1 }[event.key];
    if (direction === undefined) return;
    event.preventDefault();
    move(side, limits[side] + direction * STEP_K * (event.shiftKey ? 10 : 1));
  };
  const drag = (side: 0 | 1) => (event: PointerEvent) => {
    const handle = event.currentTarget as SVGGElement;
    if (event.type === 'pointerdown') handle.setPointerCapture(event.pointerId);
    if (!handle.hasPointerCapture(event.pointerId)) return;
    const svg = handle.ownerSVGElement as SVGSVGElement;
    move(side, x.valueAt(event.clientX - svg.getBoundingClientRect().left));
  };
  return (
    <g data-passing>
      {([0, 1] as const).map((side) => {
        const at = Math.min(box.right, Math.max(box.left, x.at(limits[side])));
        return (
          <g
            key={side}
            class="limit-handle"
            role="slider"
            tabindex={0}
            aria-label={side === 0 ? 'Lower limit of the event' : 'Upper limit of the event'}
            aria-valuemin={reach[0]}
            aria-valuemax={reach[1]}
            aria-valuenow={limits[side]}
            aria-valuetext={formatTemperature(limits[side], units.value)}
            onKeyDown={onKeyDown(side)}
            onPointerDown={drag(side)}
            onPointerMove={drag(side)}
          >
            <rect class="limit-reach" x={at - 12} width={24} y={box.top} height={box.bottom - box.top} />
            <path class="limit-line" d={`M${at.toFixed(1)} ${box.top}V${box.bottom}`} />
            <path class="limit-grip" d={`M${(at - 5).toFixed(1)} ${box.bottom - 12}h10v12h-10z`} />
          </g>
        );
      })}
    </g>
  );
}

import type { RateScale } from './rate-scale.ts';

export const AXIS_HEIGHT = 26;

/** Labels of the rate axis; the lines below are drawn by each strip. */
export function RateAxis({ scale }: { scale: RateScale }) {
  return (
    <svg class="rate-axis" width={scale.width} height={AXIS_HEIGHT} aria-hidden="true">
      {scale.start > 0 && (
        <text class="axis-label" x={scale.start / 2} y={14} text-anchor="middle">
          no rate
        </text>
      )}
      {scale.decades.map(({ x, label, hasLabel }) => (
        <g key={label}>
          {hasLabel && (
            <text class="axis-label" x={x} y={14} text-anchor="middle">
              {label}
            </text>
          )}
          <line class="grid-decade" x1={x} x2={x} y1={hasLabel ? 19 : 22} y2={AXIS_HEIGHT} />
        </g>
      ))}
      {scale.steps.map((x) => (
        <line key={x} class="grid-step" x1={x} x2={x} y1={23} y2={AXIS_HEIGHT} />
      ))}
    </svg>
  );
}

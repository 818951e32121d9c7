import type { LedgerRow } from '../model/ledger.ts';
import { InstrumentMark } from './instrument-mark.tsx';
import type { RateScale } from './rate-scale.ts';
import type { StripLayout } from './strip-layout.ts';

/** Generous width of one letter of a label, px. */
const LABEL_WIDTH = 7;

/** Logarithmic ruling as tall as the figure it lies under. */
export function RateRuling({ scale }: { scale: RateScale }) {
  const ruled = (xs: readonly number[], kind: string) =>
    xs.map((x) => <line key={x} class={kind} x1={x.toFixed(1)} x2={x.toFixed(1)} y1="0" y2="100%" />);
  return (
    <>
      {ruled(scale.steps, 'grid-step')}
      {ruled(
        scale.decades.map((decade) => decade.x),
        'grid-decade',
      )}
      {scale.start > 0 && ruled([scale.start], 'grid-edge')}
    </>
  );
}

/** Ground of one sample's strip: the line that marks sit on, and its empty decades. */
export function StripGround({ scale, layout, row }: { scale: RateScale; layout: StripLayout; row: LedgerRow }) {
  const { height, railY } = layout;
  return (
    <>
      <path class="rail" d={`M${scale.start} ${railY}H${scale.width}`} />
      {row.emptySpans.map(({ lowKPerS, highKPerS, decades }) => {
        const left = scale.x(lowKPerS);
        const width = scale.x(highKPerS) - left;
        const words = [decades === 1 ? 'empty decade' : `${decades} empty decades`, 'empty', ''];
        const label = words.find((text) => text.length * LABEL_WIDTH < width - 8);
        return (
          <g key={lowKPerS}>
            <rect class="empty-decade" x={left + 1} width={width - 2} y={3} height={height - 6} rx={2} />
            <text class="empty-decade-label" x={left + width / 2} y={height / 2 + 4} text-anchor="middle">
              {label}
            </text>
          </g>
        );
      })}
    </>
  );
}

/** Marks of one sample: one a scan at its heating rate, each an option of the list box around it. */
export function StripMarks(props: {
  layout: StripLayout;
  instruments: readonly string[];
  /** Unique prefix of the element ids of the marks */
  idPrefix: string;
  describe(mark: LedgerRow['marks'][number]): string;
}) {
  const { layout, instruments, idPrefix, describe } = props;
  return (
    <>
      {layout.placed.map(({ mark, x, y }, i) => (
        <g key={mark.key} id={`${idPrefix}-${i}`} role="option" aria-selected="false" aria-label={describe(mark)}>
          <InstrumentMark instrument={instruments.indexOf(mark.instrument)} look={mark.look} x={x} y={y} />
          {mark.concern && (
            <circle class={`mark-concern tone-${mark.concern}`} cx={(x + 6.5).toFixed(1)} cy={y - 5.5} r="3.5" />
          )}
        </g>
      ))}
    </>
  );
}

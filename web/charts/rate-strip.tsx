import type { LedgerRow } from '../model/ledger.ts';
import { InstrumentMark } from './instrument-mark.tsx';
import type { RateScale } from './rate-scale.ts';
import type { StripLayout } from './strip-layout.ts';

/** Generous width of one letter of a label, px. */
const LABEL_WIDTH = 7.5;

/** Taller than any strip, px: the figure around it cuts the lines off. */
const RULED_HEIGHT = 4000;

/** Logarithmic ruling for a figure of any height. */
export function RateRuling({ scale }: { scale: RateScale }) {
  const lines = (xs: readonly number[]): string => xs.map((x) => `M${x.toFixed(1)} 0V${RULED_HEIGHT}`).join('');
  return (
    <>
      <path class="grid-step" d={lines(scale.steps)} />
      <path class="grid-decade" d={lines(scale.decades.map((decade) => decade.x))} />
      {scale.start > 0 && <path class="grid-edge" d={lines([scale.start])} />}
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
      {row.advisedKPerS !== undefined && <AdvisedMark x={scale.x(row.advisedKPerS)} y={railY} />}
    </>
  );
}

/** Where the next scan would tell most: a ring to be filled. */
export const AdvisedMark = ({ x, y }: { x: number; y: number }) => (
  <path class="advised" d={`M${(x - 9).toFixed(1)} ${y}a9 9 0 1 1 18 0a9 9 0 1 1-18 0`} />
);

/** Marks of one sample: one a scan at its heating rate; on the page each is an option of the list box around it. */
export function StripMarks(props: {
  layout: StripLayout;
  instruments: readonly string[];
  options?: {
    /** Unique prefix of the element ids of the marks */
    idPrefix: string;
    describe(mark: LedgerRow['marks'][number]): string;
  };
}) {
  const { layout, instruments, options } = props;
  const optionOf = (mark: LedgerRow['marks'][number], i: number) =>
    options && {
      id: `${options.idPrefix}-${i}`,
      role: 'option' as const,
      'aria-selected': 'false' as const,
      'aria-label': options.describe(mark),
    };
  return (
    <>
      {layout.placed.map(({ mark, x, y }, i) => (
        <g key={mark.key} {...optionOf(mark, i)}>
          <InstrumentMark instrument={instruments.indexOf(mark.instrument)} look={mark.look} x={x} y={y} />
          {mark.concern && (
            <circle class={`mark-concern tone-${mark.concern}`} cx={(x + 6.5).toFixed(1)} cy={y - 5.5} r="3.5" />
          )}
        </g>
      ))}
    </>
  );
}

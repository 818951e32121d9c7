import type { LedgerRow } from '../model/ledger.ts';
import { InstrumentMark } from './instrument-mark.tsx';
import type { RateScale } from './rate-scale.ts';
import { MARK_SIZE, type StripLayout } from './strip-layout.ts';

/** Ground of one sample's strip: logarithmic ruling, the line that marks sit on, empty decades. */
export function StripGround({ scale, layout, row }: { scale: RateScale; layout: StripLayout; row: LedgerRow }) {
  const { height, railY } = layout;
  const ruling = (xs: readonly number[]): string => xs.map((x) => `M${x.toFixed(1)} 0V${height}`).join('');
  return (
    <g>
      <path class="grid-step" d={ruling(scale.steps)} />
      <path class="grid-decade" d={ruling(scale.decades.map((decade) => decade.x))} />
      {scale.start > 0 && <path class="grid-edge" d={`M${scale.start} 0V${height}`} />}
      <path class="rail" d={`M${scale.start} ${railY}H${scale.width}`} />
      {row.emptyDecades.map(({ lowKPerS, highKPerS }) => {
        const left = scale.x(lowKPerS);
        const width = scale.x(highKPerS) - left;
        return (
          <g key={lowKPerS}>
            <rect class="empty-decade" x={left + 1} width={width - 2} y={3} height={height - 6} rx={2} />
            {width > 46 && (
              <text class="empty-decade-label" x={left + width / 2} y={height / 2 + 4} text-anchor="middle">
                empty
              </text>
            )}
          </g>
        );
      })}
    </g>
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
            <path
              class={`mark-concern tone-${mark.concern}`}
              d={`M${(x - MARK_SIZE / 2).toFixed(1)} ${y + MARK_SIZE / 2 + 2.5}h${MARK_SIZE}`}
            />
          )}
        </g>
      ))}
    </>
  );
}

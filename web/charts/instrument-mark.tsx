import {
  symbol,
  symbolCircle,
  symbolCross,
  symbolDiamond,
  symbolSquare,
  symbolStar,
  symbolTriangle,
  symbolWye,
} from 'd3-shape';
import type { MarkLook } from '../model/ledger.ts';

/** Areas chosen so that the shapes look equally heavy, px². */
const SHAPES = [
  symbol(symbolCircle, 112)(),
  symbol(symbolTriangle, 98)(),
  symbol(symbolSquare, 104)(),
  symbol(symbolDiamond, 92)(),
  symbol(symbolCross, 96)(),
  symbol(symbolStar, 88)(),
  symbol(symbolWye, 92)(),
];
const HUES = 6;

/** A mark of an instrument: shape and colour by its place in the list of instruments (both repeat, never together within 42). */
export function InstrumentMark(props: { instrument: number; look: MarkLook; x: number; y: number }) {
  const { instrument, look, x, y } = props;
  const transform = `translate(${x.toFixed(1)} ${y.toFixed(1)})`;
  const shape = SHAPES[instrument % SHAPES.length] ?? undefined;
  return (
    <>
      <path class={`mark hue-${instrument % HUES} look-${look}`} d={shape} transform={transform} />
      {look === 'struck' && <path class="mark-strike" d="M-7.500 7.500 7.500-7.500" transform={transform} />}
    </>
  );
}

/** The same mark beside words. */
export function InstrumentKey({ instrument, look = 'full' }: { instrument: number; look?: MarkLook }) {
  return (
    <svg class="key" width="18" height="18" viewBox="-10 -10 20 20" aria-hidden="true">
      <InstrumentMark instrument={instrument} look={look} x={0} y={0} />
    </svg>
  );
}

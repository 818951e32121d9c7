import type { MarkLook } from '../model/ledger.ts';

/** Circle, triangle, square, diamond, cross, star, wye; of areas from 112 down to 88 px² so that they look equally heavy. */
const SHAPES = [
  'M5.971 0A5.971 5.971 0 1 1-5.971 0A5.971 5.971 0 1 1 5.971 0',
  'M0-8.686 7.522 4.343H-7.522Z',
  'M-5.099-5.099h10.198v10.198h-10.198Z',
  'M0-8.926 5.153 0 0 8.926-5.153 0Z',
  'M-6.573-2.191H-2.191V-6.573H2.191V-2.191H6.573V2.191H2.191V6.573H-2.191V2.191H-6.573Z',
  'M0-8.854 1.988-2.736H8.421L3.216 1.045 5.204 7.163 0 3.382-5.204 7.163-3.216 1.045-8.421-2.736H-1.988Z',
  'M2.588 1.494V6.671H-2.588V1.494L-7.072-1.094-4.483-5.577 0-2.989 4.483-5.577 7.072-1.094Z',
];
const HUES = 6;

/** A mark of an instrument: shape and colour by its place in the list of instruments (both repeat, never together within 42). */
export function InstrumentMark(props: { instrument: number; look: MarkLook; x: number; y: number }) {
  const { instrument, look, x, y } = props;
  const transform = `translate(${x.toFixed(1)} ${y.toFixed(1)})`;
  const shape = SHAPES[instrument % SHAPES.length];
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

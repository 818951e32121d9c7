import { smoothSignal } from './smooth.ts';
import type { EventWindow } from './window.ts';

/** Half width of the local cubics that a response is undone on, measured full widths: the event itself is narrower than it looks. */
const UNDOING_HALF_WIDTH = 1 / 14;

/**
 * The window with its first-order response undone, y + τ dy/dt (smoothed just enough for the slope). Noise far slower than τ stays what it
 * was, so that `noise` still holds for whole flanks.
 * @param widthS full width at half maximum as measured, s
 */
export function undoResponse(w: EventWindow, responseS: number, widthS: number): EventWindow {
  const { value, slope } = smoothSignal(w.t, w.y, 0, w.t.length, UNDOING_HALF_WIDTH * widthS);
  return { ...w, y: value.map((v, i) => v + responseS * slope[i]), undoneS: responseS };
}

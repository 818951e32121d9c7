import type { Bell } from './excess.ts';
import type { GlassTransition } from './glass-transition.ts';
import type { Melting } from './melting.ts';
import type { EventWindow } from './window.ts';

/** What bounds the flanks of an event, s. */
export interface Room {
  /** End of whatever comes before (an event), start of whatever follows; the window's ends where nothing does */
  fromS: number;
  toS: number;
  glass?: GlassTransition;
  melting?: Melting;
  /** First-order response of the signal, s: an exponential tail */
  responseS: number;
  /** An isothermal event or a metal's melting: no exponential foot, a longer tail, no step of the heat capacity, no need of a flank before it */
  footless?: boolean;
  /** Ends of the event as the user set them, s: in the place of those found; flanks lie beyond */
  limits?: { leftS: number; rightS: number };
  /** Area of the whole event where mass and enthalpy are known, signal units × s; used where its end is hidden */
  knownArea?: number;
}

/** Limits in half widths from the peak, where there is room and where there is not: 0.2 % and 3 % of the height, 0.1 % and 1 % are left. */
export const RAMP_REACH = { left: { far: 5, near: 3.3 }, right: { far: 3.2, near: 2.4 } };
/** On a hold a JMAK event of n ≤ 4 begins at most 2.4 left half widths before its peak; 0.1 % are left 2.4 (n = 3) to 3.6 (n = 1.5) right ones behind it. */
const HOLD_REACH = { left: { far: 3.5, near: 2.5 }, right: { far: 4.2, near: 2.7 } };
/** The tail of a response: 0.25 % are left after six time constants. */
const RESPONSE_TAILS = 6;
const LEAST_RESPONSE_TAILS = 3.5;
/** Flank wished for, shortest one that counts, and the longest looked at, widths. */
export const FLANK = { wished: 0.8, least: 0.35, longest: 4.5 };

/** Full width of the highest event, s. */
export const widthOf = (bells: Bell[]): number => {
  const b = bells.reduce((a, c) => (c.height > a.height ? c : a));
  return b.leftS + b.rightS;
};

/** Where an event ends on either side and how far its flanks reach. */
export interface Limits {
  leftS: number;
  rightS: number;
  /** outer ends of the flanks, s */
  fromS: number;
  toS: number;
  freeLeft: boolean;
  freeRight: boolean;
  glassOverlap: boolean;
  meltingOverlap: boolean;
}

/**
 * Limits at the far reach of the bells where there is room for a flank beside them, nearer where there is not, and what to do where even
 * that is too far: the glass transition or melting is part of what is fitted, or the event is cut.
 * @param extra half widths added where a tail still stood
 */
export function placeLimits(
  w: EventWindow,
  bells: Bell[],
  room: Room,
  extra: { left: number; right: number },
): Limits | { cut: 'before' | 'behind' } {
  const n = w.t.length;
  const [first, last] = [bells[0], bells[bells.length - 1]];
  const width = widthOf(bells);
  const bin = (w.t[n - 1] - w.t[0]) / (n - 1);
  const least = Math.max(FLANK.least * width, 3 * bin);

  if (room.limits) return givenLimits(w, room, room.limits, 3 * bin);
  const reach = room.footless ? HOLD_REACH : RAMP_REACH;
  const edgeLeft = Math.max(room.fromS, w.t[0]);
  const glassEnd = room.glass && room.glass.toS > edgeLeft ? room.glass.toS : edgeLeft;
  const nearLeft = first.peakS - reach.left.near * first.leftS;
  const farLeft = first.peakS - (reach.left.far + extra.left) * first.leftS;
  let fromS = glassEnd;
  let leftS = Math.min(nearLeft, Math.max(farLeft, fromS + FLANK.wished * width));
  let glassOverlap = false;
  if (leftS - fromS < least) {
    if (fromS === edgeLeft && !room.footless) return { cut: 'before' };
    // On a hold the event may begin at once. On a ramp the glass transition reaches into the event: its own glass side gives slope and curvature, the level comes from the right.
    glassOverlap = !room.footless;
    fromS = edgeLeft;
    leftS = room.glass?.fromS ?? edgeLeft;
  }

  const edgeRight = Math.min(room.toS, w.t[n - 1]);
  const meltingStart = room.melting && room.melting.fromS < edgeRight ? room.melting.fromS : edgeRight;
  const nearRight = last.peakS + Math.max(reach.right.near * last.rightS, LEAST_RESPONSE_TAILS * room.responseS);
  const farRight =
    last.peakS + Math.max((reach.right.far + extra.right) * last.rightS, RESPONSE_TAILS * room.responseS);
  let toS = meltingStart;
  let rightS = Math.max(nearRight, Math.min(farRight, toS - FLANK.wished * width));
  let meltingOverlap = false;
  if (toS - rightS < least) {
    if (toS === edgeRight) return { cut: 'behind' };
    meltingOverlap = true;
    toS = edgeRight;
    rightS = Math.max(room.melting!.toS, nearRight);
  }
  return {
    leftS,
    rightS,
    fromS,
    toS,
    freeLeft: leftS <= farLeft && !glassOverlap,
    freeRight: rightS >= farRight && !meltingOverlap,
    glassOverlap,
    meltingOverlap,
  };
}

/** The user's limits with all the room beyond them as flanks; cut where no flank of at least `leastS` is left. */
function givenLimits(
  w: EventWindow,
  room: Room,
  { leftS, rightS }: NonNullable<Room['limits']>,
  leastS: number,
): Limits | { cut: 'before' | 'behind' } {
  const fromS = Math.max(room.fromS, w.t[0]);
  const toS = Math.min(room.toS, w.t[w.t.length - 1]);
  if (leftS - fromS < leastS) return { cut: 'before' };
  if (toS - rightS < leastS) return { cut: 'behind' };
  const found = { freeLeft: false, freeRight: false, glassOverlap: false, meltingOverlap: false };
  return { leftS, rightS, fromS, toS, ...found };
}

import { type ReadonlySignal, useComputed, useSignal } from '@preact/signals';
import type { RefObject } from 'preact';
import { useLayoutEffect } from 'preact/hooks';
import { isPrinting } from '../state/printing.ts';

/** How far beyond the window a row counts as near: about one window, so that slow scrolling never meets an empty row. */
const MARGIN = '800px 0px';
/** Rows that change in one frame; a row of 40 marks takes some five milliseconds. */
const PER_FRAME = 2;

const changes = new Map<Element, () => void>();
let frame = 0;

/** Runs a change that draws a row in one of the next frames; a later change of the same row takes its place. */
export function changeSoon(row: Element, change: () => void): void {
  changes.set(row, change);
  if (frame === 0) frame = requestAnimationFrame(applyChanges);
}

function applyChanges(): void {
  frame = 0;
  for (const [element, change] of [...changes].slice(0, PER_FRAME)) {
    changes.delete(element);
    change();
  }
  if (changes.size > 0) frame = requestAnimationFrame(applyChanges);
}

type Listener = (entry: IntersectionObserverEntry) => void;
const listeners = new WeakMap<Element, Listener>();
const observer = new IntersectionObserver(
  (entries) => {
    for (const entry of entries) {
      const listener = listeners.get(entry.target);
      if (listener) changeSoon(entry.target, () => listener(entry));
    }
  },
  { rootMargin: MARGIN },
);

export interface Nearness {
  /** Whether the element is worth drawing in full. */
  isNear: ReadonlySignal<boolean>;
  /** Height it had when last drawn in full, px; 0 before. */
  height: ReadonlySignal<number>;
}

/**
 * Tells when an element comes near the window, a few elements a frame, so that a jump down a long page draws without a stall. What
 * surely stands in the first window `isFirst`: it is drawn without looking.
 */
export function useNear(element: RefObject<HTMLElement | null>, isFirst = false): Nearness {
  const seen = useSignal(isFirst);
  const height = useSignal(0);
  const isNear = useComputed(() => seen.value || isPrinting.value);
  useLayoutEffect(() => {
    const watched = element.current;
    if (!watched) return;
    listeners.set(watched, (entry) => {
      if (seen.value && !entry.isIntersecting) height.value = entry.boundingClientRect.height;
      seen.value = entry.isIntersecting;
    });
    observer.observe(watched);
    return () => {
      observer.unobserve(watched);
      changes.delete(watched);
    };
  }, []);
  return { isNear, height };
}

import { useLayoutEffect, useState } from 'preact/hooks';
import { afterPaint } from '../state/after-paint.ts';
import { isPrinting } from '../state/printing.ts';

/**
 * How many of a page's `count` parts are drawn: the first at once, each other one after what stands above it is on the screen; on paper
 * all. A long page then shows its head as soon as that is ready, and answers in between.
 */
export function useParts(count: number): number {
  const [drawn, setDrawn] = useState(1);
  useLayoutEffect(() => {
    let isGone = false;
    if (drawn < count)
      afterPaint(() => {
        if (!isGone) setDrawn(drawn + 1);
      });
    return () => {
      isGone = true;
    };
  }, [drawn, count]);
  return isPrinting.value ? count : drawn;
}

import { useLayoutEffect, useRef, useState } from 'preact/hooks';
import { isPrinting, PRINT_WIDTH } from '../state/printing.ts';

/** Width in px of the element (without padding) that takes the ref, as it changes; 0 until measured; on paper what fits there. */
export function useWidth<E extends HTMLElement>() {
  const ref = useRef<E>(null);
  const [width, setWidth] = useState(0);
  useLayoutEffect(() => {
    if (!ref.current) return;
    setWidth(Math.floor(ref.current.clientWidth));
    const observer = new ResizeObserver(([entry]) => setWidth(Math.floor(entry.contentRect.width)));
    observer.observe(ref.current);
    return () => observer.disconnect();
  }, []);
  return [ref, isPrinting.value ? Math.min(width, PRINT_WIDTH) : width] as const;
}

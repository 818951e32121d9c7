import { signal } from '@preact/signals';

/** Width of a figure that fits any paper in use, px. */
export const PRINT_WIDTH = 640;

/** Whether the page is being laid out for paper: then all is drawn, nothing is folded away. */
export const isPrinting = signal(false);

addEventListener('beforeprint', () => {
  isPrinting.value = true;
});
addEventListener('afterprint', () => {
  isPrinting.value = false;
});

const paper = matchMedia('print');
paper.addEventListener('change', () => {
  isPrinting.value = paper.matches;
});

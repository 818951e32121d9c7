import { signal } from '@preact/signals';

const narrow = matchMedia('(max-width: 40rem)');

/** Whether the page is as narrow as a telephone: the same limit as in the style sheets. */
export const isNarrow = signal(narrow.matches);

narrow.addEventListener('change', () => {
  isNarrow.value = narrow.matches;
});

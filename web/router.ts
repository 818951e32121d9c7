import { signal } from '@preact/signals';

/** Path of the address shown, e.g. `/campaigns/abc`. */
export const path = signal(location.pathname);

export function navigate(to: string): void {
  history.pushState(null, '', to);
  path.value = location.pathname;
  scrollTo(0, 0);
  // Keyboard and screen reader go on in the new view, not where the link was.
  document.getElementById('main')?.focus({ preventScroll: true });
}

addEventListener('popstate', () => {
  path.value = location.pathname;
});

// Links inside the page change the view without a reload; anything special (new tab, download, hash) is left to the browser.
addEventListener('click', (event) => {
  if (
    event.defaultPrevented ||
    event.button !== 0 ||
    event.metaKey ||
    event.ctrlKey ||
    event.shiftKey ||
    event.altKey
  ) {
    return;
  }
  const link = (event.target as Element | null)?.closest?.('a');
  if (!link || link.target || link.hasAttribute('download') || link.origin !== location.origin) return;
  if (link.pathname.startsWith('/v1/') || link.getAttribute('href')?.startsWith('#')) return;
  event.preventDefault();
  navigate(link.pathname);
});

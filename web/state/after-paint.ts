/** Runs once what was just drawn is on the screen; at once where nothing is painted, as in a tab in the background. */
export function afterPaint(run: () => void): void {
  if (document.visibilityState === 'hidden') run();
  else requestAnimationFrame(() => setTimeout(run));
}

import type { Route } from './routes.ts';

/** Views that are a step further in: their script comes when one is asked for, so that the first page stays small. */
export const laterViews = {
  sample: async () => (await import('./views/sample.tsx')).SampleView,
  instrument: async () => (await import('./views/instrument.tsx')).InstrumentView,
  jobs: async () => (await import('./views/jobs.tsx')).JobsView,
};

/** Brings the script of the view that an address names, if it comes later. */
export async function bringView({ view }: Route): Promise<void> {
  if (view in laterViews) await laterViews[view as keyof typeof laterViews]();
}

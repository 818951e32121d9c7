import type { ComponentType } from 'preact';
import type { Route } from './routes.ts';

/** A view that is a step further in: its script comes when it is asked for, so that the first page stays small. */
export interface LaterView<Props> {
  /** Once it is here */
  view?: ComponentType<Props>;
  bring(): Promise<void>;
}

function laterView<Props>(load: () => Promise<ComponentType<Props>>): LaterView<Props> {
  const later: LaterView<Props> = {
    async bring() {
      later.view ??= await load();
    },
  };
  return later;
}

export const laterViews = {
  sample: laterView(async () => (await import('./views/sample.tsx')).SampleView),
  instrument: laterView(async () => (await import('./views/instrument.tsx')).InstrumentView),
  jobs: laterView(async () => (await import('./views/jobs.tsx')).JobsView),
};

/** Brings the script of the view that an address names, if it comes later. */
export async function bringView({ view }: Route): Promise<void> {
  if (view in laterViews) await laterViews[view as keyof typeof laterViews].bring();
}

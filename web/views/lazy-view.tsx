import { type ComponentType, createElement } from 'preact';
import { useLayoutEffect, useState } from 'preact/hooks';
import { asProblem, type Problem } from '../client/request.ts';
import { ProblemNotice } from './notice.tsx';

/** A view that is loaded when it is first shown. */
export function lazyView<Props extends object>(load: () => Promise<ComponentType<Props>>): ComponentType<Props> {
  let loaded: ComponentType<Props> | undefined;
  return function LazyView(props: Props) {
    const [problem, setProblem] = useState<Problem | undefined>(undefined);
    const [, redraw] = useState(0);
    // Before the screen is painted: a view whose script is there already is shown at once.
    useLayoutEffect(() => {
      if (loaded) return;
      load().then(
        (view) => {
          loaded = view;
          redraw(1);
        },
        (error) => setProblem(asProblem(error)),
      );
    }, []);
    if (problem) return <ProblemNotice problem={problem} />;
    const View = loaded;
    return View ? createElement(View, props) : <h1 class="waiting">Loading the page…</h1>;
  };
}

import { type ComponentType, createElement } from 'preact';
import { useEffect, useState } from 'preact/hooks';
import { asProblem, type Problem } from '../client/request.ts';
import { ProblemNotice } from './notice.tsx';

/** A view that is loaded when it is first shown. */
export function lazyView<Props extends object>(load: () => Promise<ComponentType<Props>>): ComponentType<Props> {
  let loaded: ComponentType<Props> | undefined;
  return function LazyView(props: Props) {
    const [problem, setProblem] = useState<Problem | undefined>(undefined);
    const [, redraw] = useState(0);
    useEffect(() => {
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

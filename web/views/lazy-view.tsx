import { type ComponentType, createElement } from 'preact';
import { useLayoutEffect, useState } from 'preact/hooks';
import { asProblem, type Problem } from '../client/request.ts';
import type { LaterView } from '../later-views.ts';
import { ProblemNotice } from './notice.tsx';

/** Shows a view that comes later: at once where it is here already. */
export function lazyView<Props extends object>(later: LaterView<Props>): ComponentType<Props> {
  return function LazyView(props: Props) {
    const [problem, setProblem] = useState<Problem | undefined>(undefined);
    const [, redraw] = useState(0);
    useLayoutEffect(() => {
      if (later.view) return;
      later.bring().then(
        () => redraw(1),
        (error) => setProblem(asProblem(error)),
      );
    }, []);
    if (problem) return <ProblemNotice problem={problem} />;
    return later.view ? createElement(later.view, props) : <h1 class="waiting">Loading the page…</h1>;
  };
}

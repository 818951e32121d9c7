import type { ComponentChildren } from 'preact';
import { SeverityGlyph } from '../charts/state-glyph.tsx';
import type { Problem } from '../client/request.ts';

/** Something the reader must know: what it is, the detail, what to do. */
export function Notice(props: {
  tone: 'stop' | 'warn';
  title: string;
  detail: string;
  action: string;
  /** It stands for a whole page: its title is the page's */
  isPage?: boolean;
  children?: ComponentChildren;
}) {
  const { tone, title, detail, action, isPage, children } = props;
  return (
    <div class={`notice tone-${tone}`} role="alert">
      <SeverityGlyph severity={tone} />
      <div>
        {isPage ? <h1 class="notice-title">{title}</h1> : <p class="notice-title">{title}</p>}
        <p>{detail}</p>
        <p>{action}</p>
        {children && <p>{children}</p>}
      </div>
    </div>
  );
}

export const ProblemNotice = ({ problem, isPage }: { problem: Problem; isPage?: boolean }) => (
  <Notice
    isPage={isPage}
    tone={problem.status === 0 ? 'warn' : 'stop'}
    title={problem.title}
    detail={problem.detail}
    action={problem.action}
  />
);

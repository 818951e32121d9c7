import type { ComponentChildren } from 'preact';
import { SeverityGlyph } from '../charts/state-glyph.tsx';
import type { Problem } from '../client/request.ts';

/** Something the reader must know: what it is, the detail, what to do. */
export function Notice(props: {
  tone: 'stop' | 'warn';
  title: string;
  detail: string;
  action: string;
  children?: ComponentChildren;
}) {
  const { tone, title, detail, action, children } = props;
  return (
    <div class={`notice tone-${tone}`} role="alert">
      <SeverityGlyph severity={tone} />
      <div>
        <p class="notice-title">{title}</p>
        <p>{detail}</p>
        <p>{action}</p>
        {children && <p>{children}</p>}
      </div>
    </div>
  );
}

export const ProblemNotice = ({ problem }: { problem: Problem }) => (
  <Notice
    tone={problem.status === 0 ? 'warn' : 'stop'}
    title={problem.title}
    detail={problem.detail}
    action={problem.action}
  />
);

import type { ComponentChildren } from 'preact';
import type { Link } from '../client/follow-status.ts';
import type { Problem } from '../client/request.ts';
import type { Campaign } from '../client/rows.ts';
import { campaignPath } from '../routes.ts';
import { ProblemNotice } from './notice.tsx';
import { LINK_WORDS } from './progress.tsx';

/** Head of a page below a campaign: the way back, the name, what it says of itself. */
export function PageHead(props: {
  campaign: Campaign;
  title: string;
  link: Link;
  beside?: ComponentChildren;
  children?: ComponentChildren;
}) {
  const { campaign, title, link, beside, children } = props;
  return (
    <header class="page-head">
      <nav class="crumbs" aria-label="Way back">
        <a href="/">Campaigns</a> <span aria-hidden="true">/</span>{' '}
        <a href={campaignPath(campaign.id)}>{campaign.name}</a>
        <span class={`link link-${link}`}>{LINK_WORDS[link]}</span>
      </nav>
      <div class="campaign-title">
        <h1>{title}</h1>
        {beside}
      </div>
      {children}
    </header>
  );
}

/** While a page has nothing to show yet: what it waits for, or why it cannot. */
export function NotYet(props: { problem: Problem | undefined; what: string; campaignId: string }) {
  const { problem, what, campaignId } = props;
  if (!problem) return <h1 class="waiting">Loading {what}…</h1>;
  return (
    <>
      <ProblemNotice problem={problem} isPage />
      <p>
        <a href={campaignPath(campaignId)}>To the campaign</a>, <a href="/">all campaigns</a>
      </p>
    </>
  );
}

import { type Signal, useSignal } from '@preact/signals';
import type { ComponentChildren } from 'preact';
import { useEffect, useMemo } from 'preact/hooks';
import { EventTable } from '../charts/number-table.tsx';
import { StateGlyph } from '../charts/state-glyph.tsx';
import type { Campaign, ScanRow, Status } from '../client/rows.ts';
import { formatCount } from '../format.ts';
import { FIGURES } from '../model/captions.ts';
import { buildLanes, OTHER_KINDS, partLanes } from '../model/curves.ts';
import { numbersBySample } from '../model/headline.ts';
import { tellableNow } from '../model/next-steps.ts';
import { identifyScans } from '../model/scan-ids.ts';
import { describeVerdict } from '../model/verdict.ts';
import { samplePath } from '../routes.ts';
import { openSample, type SampleData } from '../state/live-sample.ts';
import { units } from '../state/units.ts';
import { SAMPLE_STATE_NAMES, verdictName } from '../words.ts';
import { Downloads } from './download.tsx';
import { Figure } from './figure.tsx';
import { Forecasts } from './forecasts.tsx';
import { Lanes } from './lanes.tsx';
import { NextSteps } from './next-steps.tsx';
import { ProblemNotice } from './notice.tsx';
import { plotWidth } from './numbers.tsx';
import { NotYet, PageHead } from './page-head.tsx';
import { ConversionFigures, EnergyFigures, InstrumentKeys, KissingerFigures, OtherFigures } from './sample-figures.tsx';
import { ScanPanel } from './scan-panel.tsx';
import { ScanTable } from './scan-table.tsx';
import { useParts } from './use-parts.ts';

/** One sample: its scans, what they give, and what is in doubt. */
export function SampleView({ id, sample: name }: { id: string; sample: string }) {
  const live = useMemo(() => openSample(id, name), [id, name]);
  useEffect(() => () => live.close(), [live]);
  const pointed = useSignal<string | undefined>(undefined);
  const chosen = useSignal<string | undefined>(undefined);
  const campaign = live.campaign.value;
  const data = live.data.value;
  const problem = live.problem.value;
  useEffect(() => {
    document.title = `${name} – ${campaign?.name ?? 'ratespan'}`;
  }, [name, campaign?.name]);

  const lanes = useMemo(() => {
    const { thermogram, baseline } = data?.curves ?? {};
    return data && thermogram && baseline ? buildLanes(thermogram, baseline, data.scans) : [];
  }, [data]);
  const parted = useMemo(() => partLanes(lanes), [lanes]);
  const instruments = useMemo(() => {
    const names = [...(data?.instruments ?? []), ...(data?.scans ?? [])].map((row) => row.instrument ?? '');
    return [...new Set(names)].filter(Boolean).sort((a, b) => (a < b ? -1 : 1));
  }, [data]);
  const ids = useMemo(() => identifyScans(data?.scans ?? [], data?.listed ?? []), [data]);
  if (!campaign || !data) return <NotYet problem={problem} what="the sample" campaignId={id} />;

  const { sample, curves, scans, below } = data;
  const others = live.status.value?.samples ?? [];
  const place = others.findIndex((s) => s.id === sample.id);
  const neighbours = [
    { words: '← ', to: others[place - 1], after: '' },
    { words: '', to: others[place + 1], after: ' →' },
  ];
  const of = [campaign.name, sample.sample];
  // Until one is chosen, a scan from the middle of the rates.
  const shownId = chosen.value ?? lanes[Math.floor(lanes.length / 2)]?.key;
  const shownRow = scans.find((row) => ids.get(row) === shownId);
  const show = (key: string): void => {
    chosen.value = key;
    requestAnimationFrame(() => document.getElementById('scan-alone')?.scrollIntoView({ block: 'nearest' }));
  };
  return (
    <>
      <PageHead
        campaign={campaign}
        title={sample.sample}
        link={live.link.value}
        beside={
          <nav class="neighbours" aria-label="Other samples">
            {neighbours.map(
              ({ words, to, after }) =>
                to && (
                  <a key={to.id} href={samplePath(id, to.sample)}>
                    {words}
                    {to.sample}
                    {after}
                  </a>
                ),
            )}
          </nav>
        }
      >
        <p class="sample-state" aria-live="polite">
          <StateGlyph state={sample.state} />
          {SAMPLE_STATE_NAMES[sample.state]}
          {sample.verdict && <span class="verdict">{verdictName(sample.verdict)}</span>}
          {sample.reason && <span class="entry-reason">{sample.reason}</span>}
        </p>
        {data.verdicts.map((verdict) => (
          <p key={verdict.event} class="verdict-words">
            {data.verdicts.length > 1 && `Event ${verdict.event}: `}
            {describeVerdict(verdict, units.value)}
          </p>
        ))}
      </PageHead>
      {problem && <ProblemNotice problem={problem} />}
      <section class="figures" aria-labelledby="curves-title">
        <h2 id="curves-title" class="unseen">
          Curves
        </h2>
        {lanes.length === 0 ? (
          <p class="waiting">No scan of this sample is reduced yet. Its curves are drawn here as soon as one is.</p>
        ) : (
          <>
            <div class="figure-column">
              {(['thermogram', 'hold'] as const).map((kind) => {
                const own = kind === 'hold' ? parted.holds : parted.scans;
                if (own.length === 0) return null;
                const series = own.map((lane) => lane.trace);
                return (
                  <Figure
                    key={kind}
                    isFirst
                    title={FIGURES[kind].title}
                    of={of}
                    curves={curves.thermogram && { ...curves.thermogram, series }}
                    caption={`${FIGURES[kind].caption} Choose one to see it by itself.`}
                    legend={<InstrumentKeys of={series} instruments={instruments} />}
                    draw={(width) => (
                      <Lanes
                        idPrefix={kind}
                        lanes={own}
                        instruments={instruments}
                        width={width}
                        pointed={pointed}
                        chosen={chosen}
                      />
                    )}
                  />
                );
              })}
            </div>
            <div class="figure-column">
              {shownId !== undefined && shownRow && (
                <AfterPaint>
                  <div id="scan-alone">
                    <ScanPanel
                      key={shownId}
                      scanId={shownId}
                      row={shownRow}
                      lane={lanes.find((lane) => lane.key === shownId)}
                      of={of}
                      instruments={instruments}
                      onCorrected={() => live.reload()}
                    />
                  </div>
                </AfterPaint>
              )}
              {curves.conversion && curves.conversion.series.length > 0 && (
                <ConversionFigures curves={curves.conversion} of={of} instruments={instruments} pointed={pointed} />
              )}
            </div>
          </>
        )}
        {below && <MoreFigures curves={curves} of={of} instruments={instruments} />}
      </section>
      {below && (
        <Below
          data={{ ...data, below }}
          campaign={campaign}
          status={live.status.value}
          ids={ids}
          instruments={instruments}
          pointed={pointed}
          onShow={show}
        />
      )}
    </>
  );
}

/** Drawn once what stands before it is on the screen. */
const AfterPaint = ({ children }: { children: ComponentChildren }) => <>{useParts(2) > 1 && children}</>;

/** Figures below those of the scans. */
function MoreFigures(props: { curves: SampleData['curves']; of: readonly string[]; instruments: readonly string[] }) {
  const { curves, of, instruments } = props;
  return (
    <>
      {curves.kissinger && curves.kissinger.series.length > 0 && (
        <KissingerFigures curves={curves.kissinger} of={of} instruments={instruments} />
      )}
      {curves.energy && curves.energy.series.length > 0 && <EnergyFigures curves={curves.energy} of={of} />}
      {OTHER_KINDS.map((kind) => {
        const other = curves[kind];
        return other && other.series.length > 0 ? (
          <OtherFigures key={kind} curves={other} of={of} instruments={instruments} />
        ) : null;
      })}
    </>
  );
}

/** What stands below the figures. */
function Below(props: {
  data: Required<SampleData>;
  campaign: Campaign;
  status: Status | undefined;
  ids: Map<ScanRow, string>;
  instruments: readonly string[];
  pointed: Signal<string | undefined>;
  onShow(key: string): void;
}) {
  const { data, campaign, status, ids, instruments, pointed, onShow } = props;
  const { sample, scans, below } = data;
  const told = tellableNow(below.flags, below.gaps, status);
  const numbers = numbersBySample(below.parameters).get(sample.sample) ?? [];
  const drawn = useParts(4);
  return (
    <>
      <section class="numbers" aria-labelledby="numbers-title">
        <div class="section-head">
          <h2 id="numbers-title">Numbers</h2>
          <Downloads campaign={campaign} tables={['parameters', 'verdicts']} sample={sample.sample} />
        </div>
        {numbers.length === 0 ? (
          <p class="waiting">Nothing is fitted yet. A fit needs three distinct heating rates.</p>
        ) : (
          <div class="number-tables">
            {numbers.map((event) => (
              <EventTable
                key={event.event}
                sample={sample.sample}
                isOnly={numbers.length === 1}
                numbers={event}
                plotWidth={plotWidth()}
                units={units.value}
              />
            ))}
          </div>
        )}
      </section>
      {drawn > 1 && (sample.state === 'fitted' || below.forecasts.length > 0) && (
        <Forecasts campaign={campaign} sample={sample} rows={below.forecasts} />
      )}
      {drawn > 2 && (
        <NextSteps
          campaign={campaign}
          sample={sample.sample}
          flags={told.flags}
          gaps={told.gaps}
          advice={below.advice}
          isSettled={status?.settled ?? false}
        />
      )}
      {drawn > 3 && (
        <ScanTable
          campaign={campaign}
          sample={sample.sample}
          scans={scans}
          ids={ids}
          instruments={instruments}
          pointed={pointed}
          onShow={onShow}
        />
      )}
      <p class="small">{formatCount(scans.length, 'row')}, one a scan and event.</p>
    </>
  );
}

import { useEffect, useMemo } from 'preact/hooks';
import { CorrectionPlot } from '../charts/correction-plot.tsx';
import { InstrumentKey } from '../charts/instrument-mark.tsx';
import { loadTable } from '../client/campaigns.ts';
import type { InstrumentRow, ScanRow, Status } from '../client/rows.ts';
import { formatCount, formatRate } from '../format.ts';
import { SOURCE_NAMES, withError } from '../model/correction.ts';
import { samplePath } from '../routes.ts';
import { openLivePage } from '../state/live-page.ts';
import { units } from '../state/units.ts';
import { Downloads } from './download.tsx';
import { Figure } from './figure.tsx';
import { Notice, ProblemNotice } from './notice.tsx';
import { NotYet, PageHead } from './page-head.tsx';

const openInstruments = (id: string) =>
  openLivePage(id, async (_: Status, signal) => {
    const [instruments, scans] = await Promise.all([
      loadTable(id, 'instruments', {}, signal),
      loadTable(id, 'scans', {}, signal),
    ]);
    return { instruments, scans };
  });

/** One instrument: the correction of its temperatures, where it comes from, and what was run on it. */
export function InstrumentView({ id, instrument: name }: { id: string; instrument: string }) {
  const live = useMemo(() => openInstruments(id), [id]);
  useEffect(() => () => live.close(), [live]);
  const campaign = live.campaign.value;
  const data = live.data.value;
  const problem = live.problem.value;
  useEffect(() => {
    document.title = `${name} – ${campaign?.name ?? 'ratespan'}`;
  }, [name, campaign?.name]);
  if (!campaign || !data) return <NotYet problem={problem} what="the instrument" campaignId={id} />;
  const names = [...new Set([...data.instruments, ...data.scans].map((row) => row.instrument ?? ''))]
    .filter(Boolean)
    .sort((a, b) => (a < b ? -1 : 1));
  const place = names.indexOf(name);
  const row = data.instruments.find((r) => r.instrument === name);
  const scans = data.scans.filter((scan) => scan.instrument === name && scan.status === 'reduced');
  const rates = scans.map((scan) => Math.abs(scan.rate_K_per_s ?? 0)).filter((rate) => rate > 0);
  return (
    <>
      <PageHead campaign={campaign} title={name} link={live.link.value}>
        <p class="sample-state">
          <InstrumentKey instrument={place} />
          {row?.kind ?? 'kind not known'}, {formatCount(scans.length, 'reduced scan')}
        </p>
      </PageHead>
      {problem && <ProblemNotice problem={problem} />}
      {!row && place < 0 && (
        <Notice
          tone="stop"
          title="No such instrument"
          detail={`The campaign has no instrument «${name}».`}
          action="Go back to the campaign: its last table lists every instrument."
        />
      )}
      {!row && place >= 0 && <p class="waiting">Its correction is shown here once one of its scans is reduced.</p>}
      {row && (
        <>
          <section aria-labelledby="numbers-title">
            <div class="section-head">
              <h2 id="numbers-title">Correction</h2>
              <Downloads campaign={campaign} tables={['instruments']} />
            </div>
            <Correction row={row} />
            {rates.length > 0 && row.offset_K !== null && row.lag_s !== null && (
              <Figure
                title="Correction over heating rate"
                of={[campaign.name, name]}
                caption="Temperature as measured less offset and lag × heating rate is the temperature used. The band is the 95 % interval, offset and lag taken as independent. Ticks: rates that were run."
                draw={(width) => (
                  <CorrectionPlot
                    correction={{
                      offsetK: row.offset_K as number,
                      offsetSeK: row.offset_se_K ?? 0,
                      lagS: row.lag_s as number,
                      lagSeS: row.lag_se_s ?? 0,
                    }}
                    ratesKPerS={rates}
                    instrument={place}
                    width={width}
                    units={units.value}
                  />
                )}
              />
            )}
          </section>
          <Runs campaignId={campaign.id} scans={scans} />
        </>
      )}
    </>
  );
}

function Correction({ row }: { row: InstrumentRow }) {
  const fields: [string, string][] = [
    ['Offset', withError(row.offset_K, row.offset_se_K, 'K')],
    ['Lag', withError(row.lag_s, row.lag_se_s, 's')],
    [
      'Part of the lag that smears',
      row.response_time_s === null ? 'not known' : withError(row.response_time_s, null, 's'),
    ],
    [
      'Change of offset with temperature',
      row.offset_slope === null ? 'not known' : withError(row.offset_slope, null, 'K/K'),
    ],
    [
      'True over measured heat',
      row.heat_factor === null ? 'not known' : withError(row.heat_factor, row.heat_factor_se, ''),
    ],
    ['Taken from', SOURCE_NAMES[row.source]],
    ['Scans of standards', String(row.standards ?? 0)],
  ];
  return (
    <dl class="facts">
      {fields.map(([term, words]) => (
        <div key={term}>
          <dt>{term}</dt>
          <dd class="number">{words}</dd>
        </div>
      ))}
    </dl>
  );
}

/** What was run: a line a sample. */
function Runs({ campaignId, scans }: { campaignId: string; scans: readonly ScanRow[] }) {
  const samples = [...new Set(scans.map((scan) => scan.sample ?? ''))].sort((a, b) => (a < b ? -1 : 1));
  return (
    <section aria-labelledby="runs-title">
      <h2 id="runs-title">Run on it</h2>
      <table class="stack-table">
        <thead>
          <tr>
            <th scope="col">Sample</th>
            <th scope="col">Scans</th>
            <th scope="col">Rates</th>
          </tr>
        </thead>
        <tbody>
          {samples.map((sample) => {
            const own = scans.filter((scan) => scan.sample === sample);
            const rates = [
              ...new Set(own.map((scan) => Math.abs(scan.rate_nominal_K_per_s ?? scan.rate_K_per_s ?? 0))),
            ];
            return (
              <tr key={sample}>
                <th scope="row">
                  {own[0].role === 'sample' ? (
                    <a href={samplePath(campaignId, sample)}>{sample}</a>
                  ) : (
                    `${sample}, ${own[0].role}`
                  )}
                </th>
                <td data-head="scans">{new Set(own.map((scan) => `${scan.file} ${scan.segment}`)).size}</td>
                <td class="number table-words" data-head="rates">
                  {rates
                    .sort((a, b) => a - b)
                    .map((rate) => formatRate(rate, units.value))
                    .join(', ')}
                </td>
              </tr>
            );
          })}
        </tbody>
      </table>
    </section>
  );
}

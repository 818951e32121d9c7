import { FORECAST_CAUTION, type ForecastRow } from '../../schema/wire/forecasts.ts';
import type { ParameterRow } from '../../schema/wire/parameters.ts';
import type { VerdictRow } from '../../schema/wire/verdicts.ts';
import { EventTable } from '../charts/number-table.tsx';
import type { ScanRow } from '../client/rows.ts';
import type { Units } from '../format.ts';
import { formatCount, formatFixed, formatRate } from '../format.ts';
import { describeEstimate } from '../model/describe.ts';
import { type EventNumbers, headlineEnergy, headlineExponent } from '../model/headline.ts';
import type { LedgerRow } from '../model/ledger.ts';
import { groupFlags, groupGaps } from '../model/next-steps.ts';
import { describeVerdict } from '../model/verdict.ts';
import { gapName, methodName, methodRank, SAMPLE_STATE_NAMES, sentence, verdictName } from '../words.ts';
import type { ReportData, ReportSample, SampleCurves } from './data.ts';
import { CoverageFigures, SampleFigures } from './figures.tsx';
import { GENERAL_METHODS, METHOD_TEXTS, VERDICT_METHOD } from './methods.ts';
import { AdviceReport, EnergyReport, ForecastReport, InstrumentReport, ReportTable, ScanReport } from './tables.tsx';

export interface ReportProps {
  data: ReportData;
  rows: readonly LedgerRow[];
  instruments: readonly string[];
  units: Units;
}

/** Rows of one sample. */
export interface SampleTables {
  scans: readonly ScanRow[];
  parameters: readonly ParameterRow[];
  verdicts: readonly VerdictRow[];
  forecasts: readonly ForecastRow[];
}

const PLOT_WIDTH = 170;

/** What stands before the samples. */
export function ReportHead(props: ReportProps & { figured: number }) {
  const { data, rows, instruments, units, figured } = props;
  const { tables, samples } = data;
  return (
    <>
      <Opening {...props} />
      {figured < samples.length && (
        <p>
          So many samples make a page that no reader turns: the {figured} of them with the gravest flags are told with
          their figures and every conversion; of the others the numbers, verdicts, forecasts and scans stand here, their
          energies at each conversion in parameters.csv, and their figures on the page of each sample.
        </p>
      )}
      <h2>What was measured</h2>
      <CoverageFigures rows={rows} instruments={instruments} units={units} />
      <InstrumentReport rows={tables.instruments} instruments={instruments} />
      <Methods data={data} />
    </>
  );
}

/** What stands behind the samples. */
export function ReportEnd({ data, units }: ReportProps) {
  const { tables } = data;
  return (
    <>
      {(tables.advice?.length ?? 0) > 0 && (
        <>
          <h2>What to measure next</h2>
          <AdviceReport rows={tables.advice ?? []} units={units} />
          <p class="caution">{FORECAST_CAUTION}</p>
        </>
      )}
      <Doubts data={data} />
      <Provenance data={data} />
    </>
  );
}

/** Title, what the campaign is in a sentence, and the numbers that stand for each sample. */
function Opening({ data, rows, units }: ReportProps) {
  const { tables, samples, provenance } = data;
  const marks = rows.flatMap((row) => row.marks);
  const rates = marks.map((mark) => mark.rateKPerS).filter((rate) => rate !== null);
  const low = rates.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY);
  const high = rates.reduce((a, b) => Math.max(a, b), 0);
  const verdicts = new Map(tables.verdicts?.map((row) => [`${row.sample}\u0000${row.event}`, row]));
  const numbers = new Map(rows.filter((row) => row.role === 'sample').map((row) => [row.sample, row.numbers]));
  const estimate = (row: ReturnType<typeof headlineEnergy>, unit: string): string => {
    if (!row) return '–';
    const { value, spread, method } = describeEstimate(row);
    return `${value} ${spread}${unit} (${method})`;
  };
  return (
    <>
      <h1>Crystallisation kinetics: {data.campaign}</h1>
      {provenance.isSynthetic && (
        <p>
          <strong>Synthetic data: invented materials on invented instruments.</strong>
        </p>
      )}
      <p>
        {formatCount(marks.length, 'scan')} of {formatCount(samples.length, 'sample')} on{' '}
        {formatCount(tables.instruments.length, 'instrument')}
        {rates.length > 0 && (
          <>
            , {formatRate(low, units)} to {formatRate(high, units)}: {formatFixed(Math.log10(high / low), 1)} decades of
            heating rate
          </>
        )}
        . Made by ratespan {provenance.version}
        {provenance.changedAt && ` from the state of ${provenance.changedAt}`}.
      </p>
      <ReportTable
        caption="The number that stands for each sample and event, with its 95 % interval. Every other method follows below."
        heads={['Sample', 'Activation energy, kJ/mol', 'Avrami exponent', 'Verdict and state']}
        rows={samples.flatMap((sample) => {
          const events = numbers.get(sample.sample) ?? [];
          const state = SAMPLE_STATE_NAMES[sample.state] + (sample.reason ? `: ${sample.reason}` : '');
          if (events.length === 0) return [[sample.sample, '–', '–', state]];
          return events.map((event) => {
            const verdict = verdicts.get(`${sample.sample}\u0000${event.event}`);
            return [
              events.length > 1 ? `${sample.sample}, event ${event.event}` : sample.sample,
              estimate(headlineEnergy(event), ''),
              estimate(headlineExponent(event), ''),
              verdict ? verdictName(verdict.verdict) : state,
            ];
          });
        })}
      />
    </>
  );
}

/** Only the methods that gave a number here. */
function Methods({ data }: { data: ReportData }) {
  const { parameters, verdicts, forecasts } = data.tables;
  const methods = [...new Set(parameters.map((row) => row.method))].sort((a, b) => methodRank(a) - methodRank(b));
  return (
    <>
      <h2>Methods</h2>
      {GENERAL_METHODS.map((text) => (
        <p key={text}>{text}</p>
      ))}
      <ul>
        {methods.map((method) => {
          const words = METHOD_TEXTS[method];
          return (
            <li key={method}>
              <strong>{sentence(methodName(method))}.</strong>
              {words && ` ${words.text} (${words.source}.)`}
            </li>
          );
        })}
      </ul>
      {verdicts && verdicts.length > 0 && <p>{VERDICT_METHOD}</p>}
      {forecasts && forecasts.length > 0 && (
        <p>
          Forecasts: model-free by the isoconversional energies summed along the programme, and by the shared law; below
          the lower of the glass transition and the slowest measured temperature the energy is held at its value there.
        </p>
      )}
      <p class="small">
        Settings: {data.provenance.draws} draws of the Monte Carlo; symbols: T temperature, β heating rate, α
        conversion, E activation energy, A prefactor, n Avrami exponent, R gas constant.
      </p>
    </>
  );
}

/** What a report tells of one sample, with its figures where there are curves. */
export function SampleSection(props: {
  sample: ReportSample;
  /** The rows of this sample alone */
  tables: SampleTables;
  numbers: readonly EventNumbers[];
  curves: SampleCurves | undefined;
  instruments: readonly string[];
  units: Units;
}) {
  const { sample, tables, numbers, curves, instruments, units } = props;
  const scans = tables.scans.filter((row) => row.role === 'sample');
  const { verdicts, forecasts, parameters } = tables;
  return (
    <section class="sample">
      <h2>{sample.sample}</h2>
      <p>
        {sentence(SAMPLE_STATE_NAMES[sample.state])}
        {sample.reason && `: ${sample.reason}`}.
      </p>
      {verdicts.map((verdict) => (
        <p key={verdict.event}>
          <strong>Verdict:</strong> {describeVerdict(verdict, units)}
        </p>
      ))}
      {curves && <SampleFigures curves={curves} scans={scans} instruments={instruments} units={units} />}
      {numbers.map((event) => (
        <div key={event.event} class="table-box">
          <EventTable
            sample={sample.sample}
            isOnly={numbers.length === 1}
            numbers={event}
            plotWidth={curves ? PLOT_WIDTH : 0}
            units={units}
          />
          {curves && <EnergyReport rows={parameters.filter((row) => row.event === event.event)} />}
        </div>
      ))}
      {forecasts.length > 0 && (
        <>
          <ForecastReport rows={forecasts} units={units} />
          <p class="caution">{FORECAST_CAUTION}</p>
        </>
      )}
      {scans.length > 0 && <ScanReport rows={scans} units={units} />}
    </section>
  );
}

/** What is missing and what was flagged, with what to do. */
function Doubts({ data }: { data: ReportData }) {
  const { flags, gaps } = data.tables;
  const { stop, warn, note } = groupFlags(flags, gaps);
  const groups = [
    { title: 'Stops a result', of: stop },
    { title: 'Look at', of: warn },
    { title: 'Good to know', of: note },
  ];
  return (
    <>
      <h2>Gaps and flags</h2>
      {gaps.length + flags.length === 0 && <p>Nothing is missing and nothing was flagged.</p>}
      {gaps.length > 0 && <h3>Missing measurements</h3>}
      {groupGaps(gaps).map(({ code, gaps: same }) => (
        <div key={code}>
          <p>
            <strong>{sentence(gapName(code))}</strong>
          </p>
          <ul>
            {same.map((gap) => (
              <li key={`${gap.sample} ${gap.detail}`}>
                {gap.sample || 'campaign'}: {sentence(gap.detail)} <span class="aside">{sentence(gap.action)}</span>
              </li>
            ))}
          </ul>
        </div>
      ))}
      {groups.map(
        ({ title, of }) =>
          of.length > 0 && (
            <div key={title}>
              <h3>{title}</h3>
              {of.map((group) => (
                <div key={`${group.code} ${group.action}`}>
                  <p>
                    <strong>{sentence(group.meaning)}.</strong> <span class="aside">{sentence(group.action)}</span>
                  </p>
                  <ul>
                    {group.flags.map((flag, i) => (
                      <li key={i}>
                        <span class="file">
                          {flag.file ?? ([flag.sample, flag.instrument].filter(Boolean).join(', ') || 'campaign')}
                        </span>{' '}
                        {flag.detail}
                      </li>
                    ))}
                  </ul>
                </div>
              ))}
            </div>
          ),
      )}
    </>
  );
}

function Provenance({ data }: { data: ReportData }) {
  const { version, stepVersions, seeds, inputs, draws } = data.provenance;
  const steps = Object.entries(stepVersions)
    .map(([step, number]) => `${step} ${number}`)
    .join(', ');
  return (
    <>
      <h2>Provenance</h2>
      <p>
        ratespan {version}; step versions: {steps}; {draws} draws. The same inputs, settings and versions give the same
        numbers.
      </p>
      {Object.keys(seeds).length > 0 && (
        <ReportTable
          caption="Seeds of the draws: a hash of the inputs of each sample."
          heads={['Sample', 'Seed']}
          rows={Object.entries(seeds).map(([sample, seed]) => [
            sample,
            <span key="seed" class="hash">
              {seed}
            </span>,
          ])}
        />
      )}
      <ReportTable
        caption="Inputs."
        heads={['File', 'SHA-256']}
        rows={inputs.map(({ file, sha256 }) => [
          <span key="file" class="file">
            {file}
          </span>,
          <span key="hash" class="hash">
            {sha256}
          </span>,
        ])}
      />
    </>
  );
}

import { useSignal } from '@preact/signals';
import { FORECAST_CAUTION, type ForecastRow } from '../../schema/wire/forecasts.ts';
import { askForecast, type ForecastBody } from '../client/campaigns.ts';
import { asProblem, type Problem } from '../client/request.ts';
import type { Campaign, StatusSample } from '../client/rows.ts';
import { describeForecast, parseProgramme } from '../model/forecast-words.ts';
import { units } from '../state/units.ts';
import { Downloads } from './download.tsx';
import { ProblemNotice } from './notice.tsx';

type Asked = 'time' | 'conversion' | 'limit' | 'programme';

const QUESTIONS: { asked: Asked; words: string }[] = [
  { asked: 'time', words: 'How long until' },
  { asked: 'conversion', words: 'How far after' },
  { asked: 'limit', words: 'How warm for' },
  { asked: 'programme', words: 'Along a programme' },
];

/** What the fit says of other temperatures and times: the rows of the campaign, and any question of one's own. */
export function Forecasts(props: { campaign: Campaign; sample: StatusSample; rows: readonly ForecastRow[] }) {
  const { campaign, sample, rows } = props;
  return (
    <section aria-labelledby="forecasts-title">
      <div class="section-head">
        <h2 id="forecasts-title">Forecasts</h2>
        <Downloads campaign={campaign} tables={['forecasts']} sample={sample.sample} />
      </div>
      <p class="caution">{FORECAST_CAUTION}</p>
      <Ask sampleId={sample.id} />
      {rows.length > 0 && <ForecastTable rows={rows} />}
    </section>
  );
}

function Ask({ sampleId }: { sampleId: string }) {
  const asked = useSignal<Asked>('time');
  const conversion = useSignal('0.01');
  const celsius = useSignal('60');
  const hours = useSignal('24');
  const programme = useSignal('0 25\n3600 120');
  const answers = useSignal<ForecastRow[]>([]);
  const problem = useSignal<Problem | undefined>(undefined);
  const busy = useSignal(false);
  const body = (): ForecastBody => {
    const alpha = Number(conversion.value);
    const temperature_C = Number(celsius.value);
    const time_s = Number(hours.value) * 3600;
    switch (asked.value) {
      case 'time':
        return { temperature_C, conversion: alpha };
      case 'conversion':
        return { temperature_C, time_s };
      case 'limit':
        return { time_s, conversion: alpha };
      case 'programme':
        return { program: parseProgramme(programme.value), conversion: alpha };
    }
  };
  const ask = async (event: Event): Promise<void> => {
    event.preventDefault();
    busy.value = true;
    problem.value = undefined;
    try {
      answers.value = await askForecast(sampleId, body());
    } catch (error) {
      problem.value = asProblem(error);
    } finally {
      busy.value = false;
    }
  };
  const uses = (...of: Asked[]): boolean => of.includes(asked.value);
  const field = (label: string, value: typeof conversion, step: string) => (
    <label class="ask-field">
      {label}
      <input
        type="number"
        required
        step={step}
        value={value.value}
        onInput={(event) => {
          value.value = event.currentTarget.value;
        }}
      />
    </label>
  );
  return (
    <form class="ask" onSubmit={ask}>
      <fieldset class="unit-choice">
        <legend class="unseen">Question</legend>
        {QUESTIONS.map((question) => (
          <label key={question.asked}>
            <input
              type="radio"
              name="asked"
              checked={asked.value === question.asked}
              onChange={() => {
                asked.value = question.asked;
              }}
            />
            <span>{question.words}</span>
          </label>
        ))}
      </fieldset>
      <div class="ask-fields">
        {uses('time', 'limit', 'programme') && field('conversion α', conversion, 'any')}
        {uses('time', 'conversion') && field('at °C', celsius, 'any')}
        {uses('conversion', 'limit') && field('hours', hours, 'any')}
        {uses('programme') && (
          <label class="ask-field">
            programme, each line: time in s, temperature in °C
            <textarea
              rows={4}
              required
              value={programme.value}
              onInput={(event) => {
                programme.value = event.currentTarget.value;
              }}
            />
          </label>
        )}
        <button type="submit" disabled={busy.value}>
          Ask
        </button>
      </div>
      <div aria-live="polite">
        {problem.value && <ProblemNotice problem={problem.value} />}
        {answers.value.length > 0 && <ForecastTable rows={answers.value} />}
      </div>
    </form>
  );
}

function ForecastTable({ rows }: { rows: readonly ForecastRow[] }) {
  return (
    <table class="stack-table">
      <thead>
        <tr>
          <th scope="col">Question</th>
          <th scope="col">Answer</th>
          <th scope="col">95 % band</th>
          <th scope="col">Method</th>
          <th scope="col">In words, with doubts</th>
        </tr>
      </thead>
      <tbody>
        {rows.map((row) => {
          const { question, answer, band, method, words } = describeForecast(row, units.value);
          return (
            <tr key={`${row.event} ${row.method} ${question}`}>
              <th scope="row">{question}</th>
              <td class="number" data-head="answer">
                {answer}
              </td>
              <td class="number" data-head="95 % band">
                {band}
              </td>
              <td data-head="method">{method}</td>
              <td class="table-words">{words}</td>
            </tr>
          );
        })}
      </tbody>
    </table>
  );
}

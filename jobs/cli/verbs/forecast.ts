import { readFile } from 'node:fs/promises';
import { basename } from 'node:path';
import { FORECAST_CAUTION, type ForecastQuestion, type ForecastRow } from '../../../schema/wire/forecasts.ts';
import { celsiusFromKelvin, kelvinFromCelsius } from '../../../schema/wire/units.ts';
import { readProgram } from '../../instrument/index.ts';
import type { Ports } from '../../ports/index.ts';
import { answerForecast } from '../../steps/answer-forecast.ts';
import { findCampaign, listCampaigns, listSamples } from '../../store/index.ts';
import { wrongUsage } from '../arguments.ts';
import { exists } from '../campaign-folder.ts';
import { type Client, clientFromArguments } from '../client.ts';
import { storesFromEnvironment, storesOfFile, withPorts } from '../environment.ts';
import { EXIT, ServerError, UsageError } from '../exit.ts';
import type { Terminal } from '../terminal.ts';

type Values = Record<string, string | boolean | undefined>;

/** `forecast CAMPAIGN --sample S …`: one question to the last fit of a sample, answered by every method. */
export async function forecast([name]: string[], values: Values, terminal: Terminal): Promise<number> {
  const sample = values.sample;
  if (typeof sample !== 'string') throw wrongUsage('forecast', '--sample is missing');
  if (values.db !== undefined && values.to !== undefined) {
    throw wrongUsage('forecast', '--db and --to exclude each other');
  }
  const question = await readQuestion(values);
  const rows = await ask(name, sample, question, values);
  if (rows.length === 0)
    throw new UsageError(`sample ${JSON.stringify(sample)} has no forecast: it is not fitted, or not yet`);
  if (values.json === true) terminal.out(`${JSON.stringify({ items: rows, caution: FORECAST_CAUTION }, null, 2)}\n`);
  else terminal.out(`${rows.map(lineOf).join('\n')}\n\n${FORECAST_CAUTION}\n`);
  return EXIT.done;
}

const lineOf = ({ event, method, detail }: ForecastRow): string =>
  `event ${event}, ${method === 'shared_law' ? 'shared law' : 'model-free'}: ${detail}`;

/** What is given says what is asked: as the five bodies of POST /samples/:id/forecasts. */
async function readQuestion(values: Values): Promise<ForecastQuestion> {
  const celsius = numberOf(values, 'temperature', (v) => v > -273.15, 'a temperature above -273.15 °C');
  const conversion = numberOf(values, 'conversion', (v) => v > 0 && v < 1, 'a conversion between 0 and 1');
  const timeS = numberOf(values, 'time', (v) => v > 0, 'a time above 0, in s');
  const temperatureK = celsius === undefined ? undefined : kelvinFromCelsius(celsius);
  if (values.program !== undefined) {
    if (temperatureK !== undefined || timeS !== undefined) {
      throw wrongUsage('forecast', '--program goes alone or with --conversion');
    }
    const path = String(values.program);
    const bytes = await readFile(path).catch(() => {
      throw new UsageError(`cannot read the programme ${path}`);
    });
    const { programme, flags } = readProgram(bytes, basename(path));
    if (!programme) throw new UsageError(`${path} is no programme: ${flags[0]?.detail ?? 'it has no rows'}`);
    return conversion === undefined
      ? { question: 'conversion_at_end', programme }
      : { question: 'time_to_conversion', conversion, programme };
  }
  if (temperatureK !== undefined && conversion !== undefined && timeS === undefined) {
    return { question: 'time_to_conversion', conversion, temperatureK };
  }
  if (temperatureK !== undefined && timeS !== undefined && conversion === undefined) {
    return { question: 'conversion_at_end', temperatureK, timeS };
  }
  if (conversion !== undefined && timeS !== undefined && temperatureK === undefined) {
    return { question: 'temperature_limit', conversion, timeS };
  }
  throw wrongUsage('forecast', 'two of --temperature, --conversion and --time, or --program, make a question');
}

function numberOf(
  values: Values,
  name: 'temperature' | 'conversion' | 'time',
  allowed: (value: number) => boolean,
  words: string,
): number | undefined {
  const written = values[name];
  if (written === undefined) return undefined;
  const value = Number(written);
  if (String(written).trim() !== '' && Number.isFinite(value) && allowed(value)) return value;
  throw wrongUsage('forecast', `--${name} takes ${words}, not ${JSON.stringify(written)}`);
}

async function ask(name: string, sample: string, question: ForecastQuestion, values: Values): Promise<ForecastRow[]> {
  const { db } = values;
  const client = db === undefined ? clientFromArguments(values) : undefined;
  if (client) return askServer(client, name, sample, question);
  if (db !== undefined && !(await exists(String(db)))) throw new UsageError(`there is no database file ${String(db)}`);
  const stores = db === undefined ? storesFromEnvironment() : storesOfFile(String(db));
  return withPorts({ ...stores, workers: 0 }, async (ports) => {
    const id = await findSampleId(ports, name, sample);
    try {
      return await answerForecast(ports, id, question);
    } catch (error) {
      throw error instanceof RangeError ? new UsageError(`forecast: ${error.message}`) : error;
    }
  });
}

async function findSampleId(ports: Ports, name: string, sample: string): Promise<string> {
  const campaign = await findCampaign(ports, name);
  if (!campaign) {
    const known = (await listCampaigns(ports, { limit: 10 })).map((c) => JSON.stringify(c.name));
    throw new UsageError(
      `there is no campaign ${JSON.stringify(name)} in this database; it holds ${known.join(', ') || 'none'}`,
    );
  }
  const samples = await listSamples(ports, campaign.id);
  return idOf(samples, sample);
}

function idOf(samples: readonly { id: string; sample: string }[], sample: string): string {
  const found = samples.find((one) => one.sample === sample);
  if (found) return found.id;
  const known = samples.slice(0, 10).map((one) => JSON.stringify(one.sample));
  throw new UsageError(`there is no sample ${JSON.stringify(sample)}; the campaign has ${known.join(', ') || 'none'}`);
}

async function askServer(
  client: Client,
  campaign: string,
  sample: string,
  question: ForecastQuestion,
): Promise<ForecastRow[]> {
  const { samples } = await client.status(campaign);
  const id = idOf(samples as ((typeof samples)[number] & { id: string })[], sample);
  if (id === '') throw new ServerError(`the server does not know sample ${JSON.stringify(sample)} yet`);
  const body = {
    ...('conversion' in question && { conversion: question.conversion }),
    ...('temperatureK' in question && { temperature_C: celsiusFromKelvin(question.temperatureK) }),
    ...('timeS' in question && { time_s: question.timeS }),
    ...('programme' in question && {
      program: Array.from(question.programme.timeS, (t, i) => [
        t,
        celsiusFromKelvin(question.programme.temperatureK[i]),
      ]),
    }),
  };
  return client.forecast(id, body);
}

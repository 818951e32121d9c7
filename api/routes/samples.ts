import { createRoute, z } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { answerForecast } from '../../jobs/steps/answer-forecast.ts';
import { findSample, listSampleScans } from '../../jobs/store/index.ts';
import { CURVE_KINDS } from '../../schema/wire/curve-kinds.ts';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';
import { SAMPLE_STATES } from '../../schema/wire/states.ts';
import { answerCsv, byIdOrCsv, columnsOf, formatQuery, orCsv } from '../csv-lists.ts';
import { answerCurvesCsv, CURVES_CSV } from '../curves-csv.ts';
import { jsonById } from '../json-body.ts';
import { type ApiApp, answersOf, ID_PARAM, oneOf, strict } from '../openapi.ts';
import { Problem } from '../problems.ts';
import { isUnchanged, requireCampaign, requireOf, resultAnswers } from '../results.ts';
import { readCurves } from '../sample-curves.ts';
import { CURVE_NOTES, CurvesShape } from '../shapes/curves.ts';
import { AnswerShape, QUESTION_FORMS, QuestionBody, questionOf } from '../shapes/forecasts.ts';
import { SampleScansShape } from '../shapes/overview.ts';
import { ROW_SHAPES } from '../shapes/rows.ts';

const SampleShape = z
  .object({
    id: z.string(),
    campaign_id: z.string(),
    sample: z.string(),
    state: z.enum(SAMPLE_STATES),
    reason: z.string().nullable(),
    scans: SampleScansShape,
  })
  .openapi('Sample');

const sampleRoute = createRoute({
  method: 'get',
  path: '/v1/samples/{id}',
  summary: 'One sample and its scans. Its numbers are in the parameters table of its campaign.',
  request: byIdOrCsv('its scans'),
  responses: orCsv(resultAnswers(SampleShape, 'The sample.')),
});

const curvesRoute = createRoute({
  method: 'get',
  path: '/v1/samples/{id}/curves',
  summary: 'Curves of one kind, at most 2000 points each, extremes kept.',
  description: CURVE_NOTES,
  request: { params: ID_PARAM, query: strict({ kind: oneOf(CURVE_KINDS), ...CURVES_CSV }) },
  responses: orCsv(resultAnswers(CurvesShape, 'The curves.')),
});

const requireSample = requireOf('sample', findSample);

const forecastRoute = createRoute({
  method: 'post',
  path: '/v1/samples/{id}/forecasts',
  summary: 'Answer one question about times, temperatures and conversions, from the draws of the last fit.',
  description: FORECAST_CAUTION,
  ...jsonById(QuestionBody, strict(formatQuery('the answers, one a row'))),
  responses: orCsv(answersOf(200, AnswerShape, 'The answer by every method that the data support.')),
});

export function addSampleRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(forecastRoute, async (c) => {
    const sample = await requireSample(c, ports, c.req.valid('param').id);
    const question = questionOf(c.req.valid('json'));
    if (!question)
      throw new Problem('invalid-input', `body: the fields given ask no question; allowed: ${QUESTION_FORMS}`);
    try {
      const items = await answerForecast(ports, sample.id, question);
      if (c.req.valid('query').format === 'csv')
        return answerCsv(c, 'forecast', columnsOf(ROW_SHAPES.forecasts), items);
      return c.json({ items, caution: FORECAST_CAUTION }, 200);
    } catch (error) {
      if (error instanceof RangeError) throw new Problem('invalid-input', `body: ${error.message}`);
      throw error;
    }
  });

  app.openapi(sampleRoute, async (c) => {
    const sample = await requireSample(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, await requireCampaign(c, ports, sample.campaignId))) return c.body(null, 304);
    const { id, campaignId, state, reason } = sample;
    const scans = await listSampleScans(ports, campaignId, sample.sample);
    if (c.req.valid('query').format === 'csv')
      return answerCsv(c, 'sample', columnsOf(SampleShape.shape.scans.element), scans);
    return c.json({ id, campaign_id: campaignId, sample: sample.sample, state, reason, scans }, 200);
  });

  app.openapi(curvesRoute, async (c) => {
    const sample = await requireSample(c, ports, c.req.valid('param').id);
    const { kind, format } = c.req.valid('query');
    if (isUnchanged(c, await requireCampaign(c, ports, sample.campaignId))) return c.body(null, 304);
    const curves = await readCurves(ports, sample, kind);
    return format === 'csv' ? answerCurvesCsv(c, curves) : c.json(curves, 200);
  });
}

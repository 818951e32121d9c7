import { createRoute, z } from '@hono/zod-openapi';
import type { Ports } from '../../jobs/ports/index.ts';
import { answerCalibration, type CalibrationPoints } from '../../jobs/steps/answer-calibration.ts';
import { findInstrument, readTable } from '../../jobs/store/index.ts';
import { orCsv } from '../csv-lists.ts';
import { answerCurvesCsv, CURVES_CSV } from '../curves-csv.ts';
import { type ApiApp, BY_ID, ID_PARAM, oneOf, strict } from '../openapi.ts';
import { isUnchanged, requireCampaign, requireOf, resultAnswers } from '../results.ts';
import { axisShape, type CurveSeries, seriesShape } from '../shapes/curves.ts';
import { ROW_SHAPES } from '../shapes/rows.ts';

const InstrumentShape = z
  .object({
    id: z.string(),
    campaign_id: z.string(),
    instrument: z.string(),
    row: ROW_SHAPES.instruments
      .nullable()
      .openapi({ description: 'Its row of the instruments table, once calibrated.' }),
  })
  .openapi('Instrument');

const CalibrationShape = z
  .object({ kind: z.literal('calibration'), x: axisShape, y: axisShape, series: z.array(seriesShape) })
  .openapi('CalibrationCurves');

const instrumentRoute = createRoute({
  method: 'get',
  path: '/v1/instruments/{id}',
  summary: 'One instrument and its correction.',
  request: BY_ID,
  responses: resultAnswers(InstrumentShape, 'The instrument.'),
});

const curvesRoute = createRoute({
  method: 'get',
  path: '/v1/instruments/{id}/curves',
  summary: 'How late its standards melt against heating rate, and the correction drawn from them.',
  request: { params: ID_PARAM, query: strict({ kind: oneOf(['calibration']), ...CURVES_CSV }) },
  responses: orCsv(resultAnswers(CalibrationShape, 'The curves.')),
});

/** Half width of a 95 % interval in standard errors. */
const NORMAL_975 = 1.959964;

/** Points of each standard, and the line offset + lag × rate with its 95 % band. */
function calibrationSeries({ calibration, standards }: CalibrationPoints): CurveSeries[] {
  const points = [...new Set(standards.map(({ sample }) => sample))].sort().map((sample): CurveSeries => {
    const own = standards.filter((s) => s.sample === sample).sort((a, b) => a.rateKPerS - b.rateKPerS);
    return {
      name: sample,
      x: own.map((s) => s.rateKPerS),
      y: own.map((s) => s.lateK),
      lower: own.map((s) => s.lateK - NORMAL_975 * s.errorK),
      upper: own.map((s) => s.lateK + NORMAL_975 * s.errorK),
    };
  });
  if (!calibration || standards.length === 0) return points;
  const { offsetK, offsetSeK, lagS, lagSeS, covariance } = calibration;
  const x = [0, Math.max(...standards.map((s) => s.rateKPerS))];
  const [aa, at, tt] = covariance ? [covariance[0], covariance[1], covariance[4]] : [offsetSeK ** 2, 0, lagSeS ** 2];
  const half = x.map((rate) => NORMAL_975 * Math.sqrt(Math.max(0, aa + 2 * at * rate + tt * rate ** 2)));
  const y = x.map((rate) => offsetK + lagS * rate);
  const line = { name: 'correction', x, y, lower: y.map((v, i) => v - half[i]), upper: y.map((v, i) => v + half[i]) };
  return [...points, line];
}

const requireInstrument = requireOf('instrument', findInstrument);

export function addInstrumentRoutes(app: ApiApp, ports: Ports): void {
  app.openapi(instrumentRoute, async (c) => {
    const { id, campaignId, instrument } = await requireInstrument(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, await requireCampaign(c, ports, campaignId))) return c.body(null, 304);
    let row: z.infer<typeof ROW_SHAPES.instruments> | null = null;
    for await (const found of readTable(ports, campaignId, 'instruments'))
      if (found.instrument === instrument) row = found as z.infer<typeof ROW_SHAPES.instruments>;
    return c.json({ id, campaign_id: campaignId, instrument, row }, 200);
  });

  app.openapi(curvesRoute, async (c) => {
    const { id, campaignId } = await requireInstrument(c, ports, c.req.valid('param').id);
    if (isUnchanged(c, await requireCampaign(c, ports, campaignId))) return c.body(null, 304);
    const points = await answerCalibration(ports, id);
    const curves = {
      kind: 'calibration' as const,
      x: { quantity: 'heating rate', unit: 'K/s' },
      y: { quantity: 'measured onset − melting temperature', unit: 'K' },
      series: points ? calibrationSeries(points) : [],
    };
    return c.req.valid('query').format === 'csv' ? answerCurvesCsv(c, curves) : c.json(curves, 200);
  });
}

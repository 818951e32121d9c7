import { expect, test } from 'vitest';
import { judgeCurvature } from '../../jobs/glass/index.ts';
import type { InstrumentCalibration } from '../../schema/wire/scan.ts';
import { seededRandom } from '../study/generator/random.ts';
import { decoupledLaw, type TemperatureLaw } from '../study/generator/temperature-laws.ts';
import { exactEvent, fitScanOf } from '../study/verdict-events.ts';

const R = 8.31446261815324;

// A VFT liquid written out here: ln K = 15 − B/(T − T0), E_loc = R B T²/(T − T0)²; nothing moves near T0, where the search for an event begins.
const vft: TemperatureLaw = {
  lnK: (T) => (T > 340 ? 15 - 2500 / (T - 330) : -500),
  localEnergy: (T) => (R * 2500 * T * T) / (T - 330) ** 2,
};
// The generator's MYEGA liquid.
const myega = decoupledLaw(
  { glassTransitionK: 480, fragility: 90, log10Infinity: -2.93 },
  { decoupling: 0.8, anchorK: 520, lnKAnchor: -4 },
);

const calibration = (instrument: string, kind: 'furnace' | 'chip'): InstrumentCalibration => ({
  instrument,
  kind,
  source: 'standards',
  offsetK: 0,
  offsetSeK: 0.1,
  lagS: 0,
  lagSeS: kind === 'chip' ? 1e-5 : 0.2,
  standards: 4,
});

function sentenceOf(law: TemperatureLaw): string {
  const random = seededRandom('rivals');
  const rates = { oven: [0.05, 0.15, 0.5, 1.5, 5], chip: [5, 50, 500, 5000, 30000] };
  const scans = Object.entries(rates).flatMap(([instrument, list]) =>
    list.flatMap((rateKPerS) =>
      ['1', '2', '3'].map((replicate) => {
        const exact = exactEvent(law, 2.5, rateKPerS, { offsetK: 0, lagS: 0, responseShare: 0 });
        const file = `${instrument}-${rateKPerS}-${replicate}`;
        return fitScanOf(exact, { file, instrument, rateKPerS, replicate }, 0.05 * random.normal(), 0.02);
      }),
    ),
  );
  const instruments = [calibration('oven', 'furnace'), calibration('chip', 'chip')];
  const { events } = judgeCurvature({ sample: 'S', scans, instruments, facts: {}, seed: 'rivals', draws: 60 });
  expect(events[0].row.verdict).toBe('material');
  return events[0].sentences.find((s) => s.includes('VFT')) ?? '';
}

test('on a VFT liquid VFT fits better than the bent law and MYEGA does not', () => {
  const said = sentenceOf(vft);
  expect(said).toContain('VFT fits better');
  expect(said).not.toContain('MYEGA fits better');
});

test('on a MYEGA liquid VFT fits worse, MYEGA not', () => {
  const said = sentenceOf(myega);
  expect(said).toContain('VFT fits worse');
  expect(said).not.toContain('MYEGA fits worse');
});

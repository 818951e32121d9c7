import type { CurveKind } from '../../schema/wire/curve-kinds.ts';
import { FORECAST_CAUTION } from '../../schema/wire/forecasts.ts';

/** Title and words of each figure, on the page and in the report. */
export const FIGURES: Record<
  Exclude<CurveKind, 'baseline'> | 'hold' | 'holdConversion',
  { title: string; caption: string }
> = {
  thermogram: {
    title: 'Thermograms',
    caption:
      'Every scan on one axis of temperature, the fastest at the top, each drawn to its own height. Dashed: the baseline under the event, as far as the event reaches. A tick stands above each peak.',
  },
  hold: {
    title: 'Holds',
    caption:
      'Every hold over time from its start, on a logarithmic axis, the coolest at the foot, each drawn to its own height. Dashed: the baseline under the event.',
  },
  holdConversion: {
    title: 'Conversion of holds',
    caption:
      'Conversion of each event of a hold over time from its start, from the area above its baseline. Equal shapes side by side: one exponent at every temperature.',
  },
  conversion: {
    title: 'Conversion',
    caption:
      'Conversion of each event from the area above its baseline. Lag and offset of the instrument are taken off the temperatures. The mark sits at one half.',
  },
  kissinger: {
    title: 'Kissinger plot',
    caption:
      'One mark a scan. One activation energy over all rates makes a straight line of slope −E/R; a bend is either the material’s or an instrument’s lag. Where the bend is judged, hollow marks are the peaks as measured, full ones those without the lag that the verdict found.',
  },
  energy: {
    title: 'Activation energy over conversion',
    caption:
      'One panel a method, all on the same axes, with its 95 % band; the other methods stand faint behind. The axis spans at least ±5 % of the mean.',
  },
  local_energy: {
    title: 'Local activation energy over temperature',
    caption:
      'Slope of the law over all scans, with its 95 % band, over the measured temperatures of the material. It falls with temperature where the verdict is a bend of the material.',
  },
  growth: { title: 'Growth rate', caption: 'Holds if nuclei exist before the scan begins.' },
  viscosity: { title: 'Viscosity', caption: 'Measured or derived viscosity over temperature.' },
  ttt: {
    title: 'Time, temperature, transformation',
    caption: `Time to reach a conversion when held at each temperature, with its 95 % band; heavy within the measured temperatures, carried on outside. ${FORECAST_CAUTION}`,
  },
  constant_heating: {
    title: 'Constant heating',
    caption: `Temperature at which a conversion is reached on heating from the cold at a constant rate, with its 95 % band; heavy within the measured temperatures, carried on outside. Where melting is known, lines of the shared law end there, and an upright line stands at the critical heating rate, above which less than 1 % crystallises, with its 95 % interval across its top. ${FORECAST_CAUTION}`,
  },
};

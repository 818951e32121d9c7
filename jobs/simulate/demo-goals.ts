import type { GoalAnswer } from '../../schema/wire/forecasts.ts';
import { celsiusFromKelvin, kelvinFromCelsius } from '../../schema/wire/units.ts';
import { simulateConversion } from './conversion.ts';
import { DEMO_EXCIPIENT, DEMO_FILM, DEMO_RIBBON, type DemoMaterial } from './demo-materials.ts';
import { followProgramme, type Programme } from './programme.ts';
import { lnRateConstant } from './rate-law.ts';

/** A question of the demo and what the law that was put in answers. */
export interface GoalTruth {
  sample: string;
  sentence: string;
  question: 'time_to_conversion' | 'conversion_at_end' | 'temperature_limit';
  conversion: number;
  /** As its row of goal.csv has it */
  temperatureC?: number;
  timeS?: number;
  program?: string;
  /** s, °C, or a conversion */
  value: number;
  /** Where the question has a limit */
  answer?: GoalAnswer;
}

const DAY_S = 86_400;
/** The one programme of the campaign: a year in an invented warm store. */
export const SEASONS_PATH = 'programs/warm-store-one-year.csv';
const SEASONS_STEP_S = 6 * 3600;

/** Twice 8 K between summer and winter, twice 6 K between day and night, about 28 °C. */
function seasons(): Programme {
  const rows = (365 * DAY_S) / SEASONS_STEP_S;
  return Array.from({ length: rows + 1 }, (_, i) => {
    const days = (i * SEASONS_STEP_S) / DAY_S;
    const celsius = 28 - 8 * Math.cos((2 * Math.PI * days) / 365) + 6 * Math.sin(2 * Math.PI * days);
    return [days * DAY_S, kelvinFromCelsius(Number(celsius.toFixed(2)))] as const;
  });
}

/** ln of the time in s to a conversion at constant temperature: t = [−ln(1 − α)]^(1/n)/K. */
const lnTime = ({ law, avramiExponent }: DemoMaterial, conversion: number, temperatureK: number): number =>
  Math.log(-Math.log1p(-conversion)) / avramiExponent - lnRateConstant(law, temperatureK);

function holdGoal(material: DemoMaterial, conversion: number, temperatureC: number, timeS: number, sentence: string) {
  const value = Math.exp(lnTime(material, conversion, kelvinFromCelsius(temperatureC)));
  return {
    sample: material.sample,
    sentence,
    question: 'time_to_conversion',
    conversion,
    temperatureC,
    timeS,
    value,
    answer: value >= timeS ? 'met' : 'not_met',
  } as const satisfies GoalTruth;
}

function limitGoal(material: DemoMaterial, conversion: number, timeS: number, sentence: string): GoalTruth {
  let [low, high] = [100, 2000];
  for (let i = 0; i < 60; i++) {
    const T = (low + high) / 2;
    if (lnTime(material, conversion, T) > Math.log(timeS)) low = T;
    else high = T;
  }
  const value = celsiusFromKelvin((low + high) / 2);
  return { sample: material.sample, sentence, question: 'temperature_limit', conversion, timeS, value };
}

function seasonsGoal(material: DemoMaterial, conversion: number, sentence: string): GoalTruth {
  const programme = seasons();
  const { law, avramiExponent, sample } = material;
  const times = Float64Array.from(programme, ([t]) => t);
  const along = simulateConversion(law, avramiExponent, times, followProgramme(programme, 0).sampleK).conversion;
  const value = along[along.length - 1];
  return {
    sample,
    sentence,
    question: 'conversion_at_end',
    conversion,
    program: SEASONS_PATH,
    value,
    answer: value <= conversion ? 'met' : 'not_met',
  };
}

/** The questions of the demo: kept and not kept at constant temperature, along a year, and a temperature that is asked for. */
export function demoGoals(): GoalTruth[] {
  return [
    holdGoal(DEMO_EXCIPIENT, 0.01, 40, 90 * DAY_S, '1 %, 90 days at 40 °C'),
    holdGoal(DEMO_EXCIPIENT, 0.01, 60, 90 * DAY_S, '1 %, 90 days at 60 °C'),
    seasonsGoal(DEMO_EXCIPIENT, 0.01, '1 %, a year of seasons'),
    holdGoal(DEMO_RIBBON, 0.01, 400, 60, '1 %, 60 s at 400 °C'),
    limitGoal(DEMO_RIBBON, 0.01, 3600, '1 %, an hour: at most'),
    holdGoal(DEMO_FILM, 0.5, 150, 60, '50 %, 60 s at 150 °C'),
  ];
}

/** goal.csv of the demo: what a row leaves empty is asked for; a conversion alone is asked of every programme. */
export function writeGoalSheet(goals: readonly GoalTruth[]): string {
  const rows = goals.map(({ sample, conversion, temperatureC, timeS }) =>
    [sample, conversion, temperatureC ?? '', timeS ?? '', 'synthetic'].join(','),
  );
  return `${['sample,conversion,temperature [°C],time [s],note', ...rows].join('\n')}\n`;
}

export function writeSeasons(): string {
  const rows = seasons().map(([t, T]) => `${t / 3600},${celsiusFromKelvin(T).toFixed(2)}`);
  return `${['time [h],temperature [°C]', ...rows].join('\n')}\n`;
}

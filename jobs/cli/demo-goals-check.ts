import type { GoalAnswer } from '../../schema/wire/forecasts.ts';
import { timeText } from '../forecast/index.ts';
import type { GoalTruth } from '../simulate/index.ts';
import type { ResultRow } from '../store/index.ts';
import { shortNumber, textTable } from './text-table.ts';

const WORDS: Record<GoalAnswer | '', string> = { met: 'met', not_met: 'not met', cannot_say: 'cannot say', '': '' };

/**
 * The answers of forecasts.csv by the shared law beside what the law that was put in answers: the band must hold it, and a goal must not be
 * called met or not met against it.
 */
export function compareGoals(
  goals: readonly GoalTruth[],
  forecasts: readonly ResultRow[],
): { text: string; failures: string[] } {
  const failures: string[] = [];
  const rows = goals.map((goal) => {
    const what = `${goal.sample}: ${goal.sentence}`;
    const found = forecasts.find((row) => row.method === 'shared_law' && isAbout(row, goal));
    if (!found || typeof found.value !== 'number') {
      failures.push(`${what}: no forecast`);
      return [goal.sample, goal.sentence, 'missing', shown(goal.value, goal), ''];
    }
    const [low, high] = [found.lower95, found.upper95] as (number | null)[];
    if (low === null || high === null || !(low <= goal.value && goal.value <= high))
      failures.push(`${what}: the band does not hold the true ${shown(goal.value, goal)}`);
    const answer = String(found.goal ?? '') as GoalAnswer | '';
    if (answer !== (goal.answer ?? '') && answer !== 'cannot_say')
      failures.push(`${what}: answered ${WORDS[answer] || 'nothing'}, but it is ${WORDS[goal.answer ?? '']}`);
    const band = low === null || high === null ? '' : ` [${shown(low, goal)}, ${shown(high, goal)}]`;
    return [goal.sample, goal.sentence, shown(found.value, goal) + band, shown(goal.value, goal), WORDS[answer]];
  });
  const table = textTable(
    [
      { title: 'sample' },
      { title: 'question', shrinks: true },
      { title: 'found [95 %]', right: true },
      { title: 'truth', right: true },
      { title: 'goal' },
    ],
    rows,
  );
  return { text: table, failures };
}

const isAbout = (row: ResultRow, goal: GoalTruth): boolean =>
  row.sample === goal.sample &&
  row.question === goal.question &&
  row.conversion === goal.conversion &&
  row.program === (goal.program ?? '') &&
  (goal.timeS === undefined || row.time_s === goal.timeS) &&
  (goal.temperatureC === undefined || Math.abs((row.temperature_C as number) - goal.temperatureC) < 1e-6);

function shown(value: number, { question }: GoalTruth): string {
  if (question === 'time_to_conversion') return timeText(value);
  return question === 'temperature_limit' ? `${value.toFixed(1)} °C` : shortNumber(value, 3);
}

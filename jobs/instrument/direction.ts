/** Which way an exotherm points, as the words of a file say it: `exo up`, `^exo`, `endo down`, `Exotherm direction: up`. */
import type { ExothermDirection } from '../../schema/wire/states.ts';

const UP = 'up(?:wards?)?\\b(?!\\s+to\\b)|positive\\b|pos\\b|↑|\\^|>|\\(\\+\\)';
const DOWN = 'down(?:wards?)?\\b(?!\\s+to\\b)|negative\\b|neg\\b|↓|<|\\(-\\)';
const KIND = '(exo|endo)(?:therm(?:ic|al|s|ics)?)?\\b';
/** Words that may stand between the kind and the direction. */
const BETWEEN =
  '(?:[\\s,;:=|"\'_-]|\\(|\\b(?:is|are|points?|pointing|plotted|shown|peaks?|events?|effects?|direction|heat|flow|signal)\\b)*';

const KIND_FIRST = new RegExp(`${KIND}${BETWEEN}(?:(${UP})|(${DOWN}))`, 'iu');
const DIRECTION_FIRST = new RegExp(
  `(?:\\b(up(?:wards?)?|positive)|([\\^↑>])|\\b(down(?:wards?)?|negative)|([↓<]))[\\s:=_-]*(?:is\\s+)?${KIND}`,
  'iu',
);
const PHRASE = new RegExp(`[\\[(]?\\s*(?:${KIND}[\\s:=_-]*(?:${UP}|${DOWN})|[\\^↑>↓<]\\s*${KIND})\\s*[\\])]?`, 'giu');

/** Direction said in a text, or undefined. Where `exo …` and `endo …` both stand, the first counts. */
export function directionOf(text: string): ExothermDirection | undefined {
  const spaced = text.replaceAll('_', ' ');
  const kindFirst = KIND_FIRST.exec(spaced);
  if (kindFirst !== null) return resolve(kindFirst[1], kindFirst[2] !== undefined);
  const first = DIRECTION_FIRST.exec(spaced);
  if (first !== null) return resolve(first[5], (first[1] ?? first[2]) !== undefined);
  return undefined;
}

/** The text without words of direction, so that `Heat flow (exo up) [mW]` can be read as a name with a unit. */
export function withoutDirection(text: string): string {
  return text.replaceAll('_', ' ').replace(PHRASE, ' ');
}

function resolve(kind: string, up: boolean): ExothermDirection {
  return (kind.toLowerCase() === 'exo') === up ? 'up' : 'down';
}

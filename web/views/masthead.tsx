import type { Units } from '../format.ts';
import { units } from '../state/units.ts';

function UnitChoice<Key extends keyof Units>(props: { of: Key; legend: string; choices: Units[Key][] }) {
  const { of, legend, choices } = props;
  return (
    <fieldset class="unit-choice">
      <legend class="unseen">{legend}</legend>
      {choices.map((choice) => (
        <label key={choice}>
          <input
            type="radio"
            name={`unit-${of}`}
            checked={units.value[of] === choice}
            onChange={() => {
              units.value = { ...units.value, [of]: choice };
            }}
          />
          <span>{choice}</span>
        </label>
      ))}
    </fieldset>
  );
}

/** Name of the program, way home, and the units that all views use. */
export function Masthead() {
  return (
    <header class="masthead">
      <a class="wordmark" href="/">
        <svg width="44" height="16" viewBox="0 0 44 16" aria-hidden="true">
          <path d="M1 15V1M13 15V5M20 15V7.500M25 15V9M29 15v-5M32 15v-4.200M35 15v-3.500M37.500 15v-3M39.500 15v-2.500M41.200 15v-2.200M43 15V1M1 15h42" />
        </svg>
        ratespan
      </a>
      <div class="units">
        <UnitChoice of="temperature" legend="Unit of temperature" choices={['°C', 'K']} />
        <UnitChoice of="rate" legend="Unit of heating rate" choices={['K/min', 'K/s']} />
      </div>
    </header>
  );
}

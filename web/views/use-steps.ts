import { useLayoutEffect, useState } from 'preact/hooks';

/** Time spent on steps before the browser gets its turn, ms; while nothing stands on the page there is nothing to be quick for. */
const TURN_MS = 8;
const FIRST_TURN_MS = 40;

const nextTurn = (): Promise<void> => new Promise((resolve) => setTimeout(resolve, 0));

/**
 * The outcome of work done in steps, each turn of the browser some of them; the outcome before it stands until then. Work begun for
 * other `inputs` is dropped.
 */
export function useSteps<Outcome>(
  begin: () => Generator<undefined, Outcome> | undefined,
  inputs: readonly unknown[],
): Outcome | undefined {
  const [outcome, setOutcome] = useState<Outcome | undefined>(undefined);
  useLayoutEffect(() => {
    let isDropped = false;
    const run = async (): Promise<void> => {
      const steps = begin();
      let turnEnds = performance.now() + (outcome === undefined ? FIRST_TURN_MS : TURN_MS);
      for (let step = steps?.next(); step !== undefined && !isDropped; step = steps?.next()) {
        if (step.done) return setOutcome(step.value);
        if (performance.now() < turnEnds) continue;
        await nextTurn();
        turnEnds = performance.now() + TURN_MS;
      }
    };
    void run();
    return () => {
      isDropped = true;
    };
  }, inputs);
  return outcome;
}

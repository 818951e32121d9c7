/** Part of every result key: grows when a step's results change for the same inputs, so that stored ones are not taken for its own. */
export const STEP_VERSIONS = {
  'read-scan': 1,
  'reduce-scan': 7,
  'fit-sample': 6,
  'judge-curvature': 2,
  'forecast-sample': 3,
} as const;

/** Draws of the Monte Carlo behind each interval. */
export const FIT_DRAWS = 400;

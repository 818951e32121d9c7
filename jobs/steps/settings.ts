/** Part of every result key: grows when a step's results change for the same inputs, so that stored ones are not taken for its own. */
export const STEP_VERSIONS = {
  'read-scan': 1,
  'reduce-scan': 3,
  'fit-sample': 3,
  'judge-curvature': 1,
  'forecast-sample': 1,
} as const;

/** Draws of the Monte Carlo behind each interval. */
export const FIT_DRAWS = 400;

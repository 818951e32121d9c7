/** A temperature programme: corners [time in s, temperature in K], times ascending, straight lines between them. */
export type Programme = readonly (readonly [number, number])[];

/** One ramp from one temperature to another at a rate in K/s (its sign is taken from the direction). */
export function linearRamp(startK: number, endK: number, rateKPerS: number): Programme {
  return [
    [0, startK],
    [Math.abs((endK - startK) / rateKPerS), endK],
  ];
}

export interface ProgrammeFollower {
  /** Temperature of the programme itself, K */
  furnaceK(timeS: number): number;
  /** Temperature of a sample that trails it, K */
  sampleK(timeS: number): number;
}

/**
 * A sample that follows the programme with a time constant τ: dT/dt = (T_programme − T)/τ, at rest with it at the start.
 * On a straight piece T_p = a + b s the solution is T = T_p − b τ + (T(0) − T_p(0) + b τ) exp(−s/τ): after a few τ the
 * sample trails by b τ, which is the shift part of an instrument's lag.
 */
export function followProgramme(programme: Programme, timeConstantS: number): ProgrammeFollower {
  if (programme.length < 2) throw new RangeError(`a programme needs at least two corners; got ${programme.length}`);
  const pieces = programme.slice(1).map(([endS, endK], i) => {
    const [startS, startK] = programme[i];
    if (!(endS > startS)) throw new RangeError(`programme times must ascend; got ${startS} s, then ${endS} s`);
    return { startS, startK, slope: (endK - startK) / (endS - startS), durationS: endS - startS, trailK: 0 };
  });
  // trailK: T_programme − T_sample at the start of a piece
  const trailAfter = (piece: (typeof pieces)[number], elapsedS: number): number => {
    const steady = piece.slope * timeConstantS;
    return timeConstantS === 0 ? 0 : steady + (piece.trailK - steady) * Math.exp(-elapsedS / timeConstantS);
  };
  for (let i = 1; i < pieces.length; i++) pieces[i].trailK = trailAfter(pieces[i - 1], pieces[i - 1].durationS);
  const pieceAt = (timeS: number) => pieces.findLast((p) => timeS >= p.startS) ?? pieces[0];
  const furnaceK = (timeS: number): number => {
    const piece = pieceAt(timeS);
    return piece.startK + piece.slope * (timeS - piece.startS);
  };
  return {
    furnaceK,
    sampleK(timeS) {
      const piece = pieceAt(timeS);
      return furnaceK(timeS) - trailAfter(piece, timeS - piece.startS);
    },
  };
}

/** Temperature programmes: ramps and holds, each linear in time but for a wished unsteadiness of the rate. */
export type LegSettings =
  | {
      kind: 'ramp';
      /** K/s, > 0; the sign is taken from where the leg goes */
      rateKPerS: number;
      toK: number;
      /** The rate runs from (1 − d) to (1 + d) times its mean over the leg. */
      rateDrift?: number;
    }
  | { kind: 'hold'; durationS: number };

/** One leg, smooth in itself: the integrator never steps over a joint. Both functions take the time on the programme's clock. */
export interface Leg {
  fromS: number;
  toS: number;
  temperatureK(timeS: number): number;
  rateKPerS(timeS: number): number;
}

export interface Programme {
  legs: Leg[];
  endS: number;
  temperatureK(timeS: number): number;
}

export function createProgramme(startK: number, settings: readonly LegSettings[]): Programme {
  const legs: Leg[] = [];
  let fromK = startK;
  let fromS = 0;
  for (const leg of settings) {
    const duration = leg.kind === 'hold' ? leg.durationS : Math.abs(leg.toK - fromK) / leg.rateKPerS;
    if (!(duration > 0 && Number.isFinite(duration)))
      throw new RangeError(`a leg must last: ${JSON.stringify(leg)} from ${fromK} K`);
    const rate = leg.kind === 'hold' ? 0 : (leg.toK - fromK) / duration;
    const drift = leg.kind === 'ramp' ? (leg.rateDrift ?? 0) : 0;
    const [legK, legS] = [fromK, fromS];
    legs.push({
      fromS: legS,
      toS: legS + duration,
      temperatureK: (t) => legK + rate * (t - legS) * (1 + drift * ((t - legS) / duration - 1)),
      rateKPerS: (t) => rate * (1 + drift * ((2 * (t - legS)) / duration - 1)),
    });
    fromS += duration;
    if (leg.kind === 'ramp') fromK = leg.toK;
  }
  return {
    legs,
    endS: fromS,
    temperatureK: (t) => (legs.find((leg) => t <= leg.toS) ?? legs[legs.length - 1]).temperatureK(t),
  };
}

export const rampProgramme = (startK: number, endK: number, rateKPerS: number): Programme =>
  createProgramme(startK, [{ kind: 'ramp', rateKPerS, toK: endK }]);

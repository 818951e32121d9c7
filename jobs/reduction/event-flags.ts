import { type Flag, flag } from '../../schema/wire/flags.ts';
import type { ReducedEvent } from '../../schema/wire/reduced.ts';
import { type SelfHeating, WARMING_ERROR_PART } from './self-heating.ts';

export const FEW_POINTS = 20;
export const TOO_FEW_POINTS = 8;
/** Areas above both baselines that differ by more than this raise `baseline-doubt`. */
const BASELINE_DOUBT = 0.05;
/** S above which it is told and kept out of the kinetics */
const SELF_HEATING = { told: 0.1, out: 1 };
/**
 * Where standards have not told the sample's part of the lag, S is told only where a tenth of the lag would be enough to keep the event out
 * of the kinetics. A bound above `told`, or even above `out`, is the rule on furnaces and would say nothing about the scan.
 */
const LAG_PART = 0.1;

export interface Judged {
  straightArea: number;
  lagK: number;
  responseUnknown: boolean;
  selfHeating?: SelfHeating;
  /** What the event warms its sample by at the peak, K; its temperatures hold that already */
  warmingK: number;
  /** The delay R_th m c_p of its heat was known and undone */
  contactKnown: boolean;
  glassOverlap: boolean;
  meltingOverlap: boolean;
  knownArea: boolean;
  mergedWith: number;
}

/** Everything that a user should know about one event, with the number that says it. */
export function judgeEvent(e: ReducedEvent, about: Judged, where: object): Flag[] {
  const flags: Flag[] = [];
  const tell = (code: Flag['code'], detail: string, action: string) => flags.push(flag(code, detail, action, where));
  if (e.pointsOverWidth < FEW_POINTS) {
    tell(
      'few-points',
      `Only ${e.pointsOverWidth} points lie over the event’s width (20 are needed for conversion methods).`,
      'Sample faster or scan slower.',
    );
  }
  if (e.area < 5 * e.areaError) {
    tell(
      'event-small',
      `The area ${e.area.toPrecision(3)} is below five times its error ${e.areaError.toPrecision(2)}; only temperatures are used.`,
      'Use more mass or a higher rate.',
    );
  }
  if (about.glassOverlap) {
    tell(
      'glass-transition-overlap',
      'The glass transition ends less than one width before the event, so there is no baseline between them: its step is part of what is fitted and conversions below 0.1 are left out.',
      'Nothing, or a rate at which the two lie further apart.',
    );
  }
  if (about.meltingOverlap) {
    const how = about.knownArea ? 'the enthalpy given in the sheet' : 'a JMAK-shaped tail';
    tell(
      'melting-overlap',
      `Melting begins before the signal is back at the baseline; conversion is normalised by ${how} and left out above ${e.usableTo}.`,
      about.knownArea
        ? 'Nothing.'
        : 'Give crystallization enthalpy and mass, or a rate at which the two lie further apart.',
    );
  }
  if (about.mergedWith > 0) {
    tell(
      'events-merged',
      `The signal does not return to the baseline between this event and ${about.mergedWith === 1 ? 'its neighbour' : `${about.mergedWith} others`}; they were separated by fitted asymmetric peaks.`,
      'Look at the thermogram; areas and early and late conversions carry the doubt of the separation.',
    );
  }
  const difference = about.straightArea / e.area - 1;
  if (about.mergedWith === 0 && !about.glassOverlap && !about.meltingOverlap && Math.abs(difference) > BASELINE_DOUBT) {
    tell(
      'baseline-doubt',
      `A straight baseline gives an area ${(100 * difference).toFixed(1)} % different from the conversion-weighted one (limit 5 %).`,
      'Look at the thermogram and its limits.',
    );
  }
  const heating = about.selfHeating;
  if (heating?.bound) {
    if (LAG_PART * heating.number > SELF_HEATING.out) {
      const assumed = heating.heatCapacityAssumed ? ' (heat capacity taken as 0.5 J/(g K), since none is given)' : '';
      tell(
        'self-heating-unknown',
        `Were the sample ${100 * LAG_PART} % of the instrument’s lag, the event would warm it too much: S = ${(LAG_PART * heating.number).toPrecision(2)}, limit ${SELF_HEATING.out}${assumed}. The sample’s part is not known.`,
        'Run standards, which tell the sample’s part of the lag; or repeat the scan with a third of the mass: the peak must stay.',
      );
    }
  } else if (heating && heating.number > SELF_HEATING.told) {
    const out = heating.number > SELF_HEATING.out ? '; above 1 the event stays out of the kinetics' : '';
    tell(
      'self-heating',
      `The event warms its own sample: S is ${heating.number.toPrecision(2)} (it matters above ${SELF_HEATING.told}${out}). Its temperatures are raised by what it warms, ${about.warmingK.toPrecision(2)} K at the peak, which is known to ${100 * WARMING_ERROR_PART} %.`,
      about.contactKnown
        ? 'Use less mass or a lower rate.'
        : 'Give mass and heat capacity [J/(g K)], with which the delay of the sample’s own contact is undone; or use less mass or a lower rate.',
    );
  }
  if (about.responseUnknown && Math.abs(about.lagK) > 0.1 * e.widthK) {
    tell(
      'response-unknown',
      `The lag shifts the event by ${about.lagK.toFixed(2)} K, more than a tenth of its width ${e.widthK.toFixed(2)} K, and it is not known how much of it smears the signal.`,
      'Give the response time [s] in instruments.csv, or run standards.',
    );
  }
  return flags;
}

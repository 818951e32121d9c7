import { type Derivative, type IntegratorSettings, integrate, TIGHT } from './integrator.ts';
import type { Leg } from './programme.ts';
import type { ScanModel, ScanSolution } from './scan-model.ts';
import { R } from './temperature-laws.ts';

const logistic = (x: number): number => 1 / (1 + Math.exp(-x));
/** Derivative of the logistic, safe at both ends. */
const logisticSlope = (x: number): number => {
  const p = logistic(x);
  return p * (1 - p);
};

/** Everything a state of the sample implies at one moment. */
interface Moment {
  programmeK: number;
  sampleK: number;
  laggedRate: number;
  sampleRate: number;
  stored: number;
  rates: Float64Array;
  eventW: number;
  signalW: number;
}

/**
XX * then the events' share and the whole of the signal behind the response. Where a time constant is 0 its entry follows directly and stays unused.
 */
export function createSystem(model: ScanModel) {
  const { sample, instrument, massKg, selfHeating } = model;
  const { events } = sample;
  const dimension = events.length + 4;
  const signalAt = dimension - 1;
  const eventAt = dimension - 2;
  const moment: Moment = {
    programmeK: 0,
    sampleK: 0,
    laggedRate: 0,
    sampleRate: 0,
    stored: 0,
    rates: new Float64Array(events.length),
    eventW: 0,
    signalW: 0,
  };

  /** W: heat taken up by warming, by the glass transition's overshoot and by melting. */
  const capacityW = (sampleK: number, rate: number, meanConversion: number): number => {
    const { heatCapacity, glassTransition, crystalStepJPerKgK, melting } = sample;
    let perKelvin = 0;
    if (heatCapacity)
      perKelvin += heatCapacity.jPerKgK + heatCapacity.slopeJPerKgK2 * (sampleK - heatCapacity.referenceK);
    if (glassTransition) {
      const u = (sampleK - glassTransition.temperatureK) / glassTransition.widthK;
      perKelvin += glassTransition.stepJPerKgK * logistic(u);
      // The overshoot sits just above the step: two widths on.
      perKelvin += (glassTransition.overshootJPerKg / glassTransition.widthK) * logisticSlope(u - 2);
    }
    if (crystalStepJPerKgK) perKelvin += crystalStepJPerKgK * meanConversion;
    if (melting)
      perKelvin +=
        ((meanConversion * melting.enthalpyJPerKg) / melting.widthK) *
        logisticSlope((sampleK - melting.temperatureK) / melting.widthK);
    return massKg * perKelvin * rate;
  };

  const look = (leg: Leg, t: number, y: Float64Array): Moment => {
    const { shiftS } = instrument;
    moment.programmeK = leg.temperatureK(t);
    const laggedK = shiftS > 0 ? y[0] : moment.programmeK;
    moment.laggedRate = shiftS > 0 ? (moment.programmeK - y[0]) / shiftS : leg.rateKPerS(t);
    moment.stored = selfHeating ? y[1] : 0;
    moment.sampleK = laggedK + moment.stored;
    let release = 0;
    let conversion = 0;
    for (let i = 0; i < events.length; i++) {
      const state = y[2 + i];
      moment.rates[i] = Math.exp(events[i].temperature.lnK(moment.sampleK)) * events[i].rate.rateFactor(state);
      release += events[i].enthalpyJPerKg * moment.rates[i];
      conversion += events[i].rate.conversion(state) / events.length;
    }
    const storing = selfHeating ? release / selfHeating.heatCapacityJPerKgK - y[1] / selfHeating.contactS : 0;
    moment.sampleRate = moment.laggedRate + storing;
    moment.eventW = massKg * (selfHeating ? (selfHeating.heatCapacityJPerKgK * y[1]) / selfHeating.contactS : release);
    moment.signalW = moment.eventW - capacityW(moment.sampleK, moment.laggedRate, conversion);
    return moment;
  };

  const derivative =
    (leg: Leg): Derivative =>
    (t, y, out) => {
      const now = look(leg, t, y);
      out[0] = instrument.shiftS > 0 ? now.laggedRate : 0;
      out[1] = now.sampleRate - now.laggedRate;
      for (let i = 0; i < events.length; i++) {
        const { temperature, rate } = events[i];
        out[2 + i] = Math.exp(temperature.lnK(now.sampleK)) * rate.drive(y[2 + i]);
      }
      const { responseS } = instrument;
      out[eventAt] = responseS > 0 ? (now.eventW * signalScale - y[eventAt]) / responseS : 0;
      out[signalAt] = responseS > 0 ? (now.signalW * signalScale - y[signalAt]) / responseS : 0;
    };

  // The signal is integrated in units of the events' whole heat a second, so that one tolerance suits nW and W alike.
  const totalJ = massKg * events.reduce((sum, event) => sum + Math.abs(event.enthalpyJPerKg), 0);
  const signalScale = totalJ > 0 ? 1 / totalJ : 1 / massKg;

  /** At rest at the programme's start: no lag has built up yet. */
  const start = (leg: Leg): Float64Array => {
    const y = new Float64Array(dimension);
    y[0] = leg.temperatureK(leg.fromS);
    for (let i = 0; i < events.length; i++) y[2 + i] = events[i].rate.start;
    const { eventW, signalW } = look(leg, leg.fromS, y);
    y[eventAt] = eventW * signalScale;
    y[signalAt] = signalW * signalScale;
    return y;
  };

  /** d ln(dα/dt)/dt of an event: zero at its peak. */
  const logRateSlope = (leg: Leg, t: number, y: Float64Array, event: number): number => {
    const { sampleK, sampleRate } = look(leg, t, y);
    const { temperature, rate } = events[event];
    const byTemperature = (temperature.localEnergy(sampleK) / (R * sampleK ** 2)) * sampleRate;
    return byTemperature + Math.exp(temperature.lnK(sampleK)) * rate.logRateSlope(y[2 + event]);
  };

  return { derivative, look, start, logRateSlope, signalAt, eventAt, signalScale };
}

/**
 * Noise-free solution of a scan at `timeS` (ascending, from 0 to the programme's end, s).
 * Legs are integrated one after the other, so that no step spans a joint of the programme.
 */
export function solveScan(model: ScanModel, timeS: Float64Array, settings: IntegratorSettings = TIGHT): ScanSolution {
  const { legs, endS } = model.programme;
  const count = timeS.length;
  if (count > 0 && !(timeS[0] >= 0 && timeS[count - 1] <= endS * (1 + 1e-12)))
    throw new RangeError(`times must lie in [0, ${endS}] s: ${timeS[0]} … ${timeS[count - 1]}`);
  const system = createSystem(model);
  const { events } = model.sample;
  const column = (): Float64Array => new Float64Array(count);
  const solution: ScanSolution = {
    timeS,
    programmeK: column(),
    sampleK: column(),
    conversion: events.map(column),
    ratePerS: events.map(column),
    eventW: column(),
    signalW: column(),
  };
  let y = system.start(legs[0]);
  let next = 0;
  legs.forEach((leg, index) => {
    const first = next;
    while (next < count && (timeS[next] < leg.toS || index === legs.length - 1)) next++;
    const stops = Float64Array.from([...timeS.subarray(first, next), ...(index < legs.length - 1 ? [leg.toS] : [])]);
    integrate(
      system.derivative(leg),
      leg.fromS,
      y,
      stops,
      (stop, t, state) => {
        const k = first + stop;
        if (k < next) record(leg, k, t, state);
        else y = state.slice();
      },
      settings,
    );
  });

  function record(leg: Leg, k: number, t: number, state: Float64Array): void {
    const now = system.look(leg, t, state);
    solution.programmeK[k] = now.programmeK;
    solution.sampleK[k] = now.sampleK;
    const smeared = model.instrument.responseS > 0;
    solution.eventW[k] = smeared ? state[system.eventAt] / system.signalScale : now.eventW;
    solution.signalW[k] = smeared ? state[system.signalAt] / system.signalScale : now.signalW;
    for (let i = 0; i < events.length; i++) {
      solution.conversion[i][k] = events[i].rate.conversion(state[2 + i]);
      solution.ratePerS[i][k] = now.rates[i];
    }
  }
  return solution;
}

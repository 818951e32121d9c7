import type { ExothermDirection } from '../../schema/wire/states.ts';
import { simulateConversion } from './conversion.ts';
import { followProgramme, type Programme } from './programme.ts';
import type { RateLaw } from './rate-law.ts';

export interface SimulatedMaterial {
  law: RateLaw;
  avramiExponent: number;
  enthalpyJPerKg: number;
  /** Step of the heat capacity, endothermic, as a logistic function of temperature */
  glassTransition?: {
    /** Midpoint at `rateKPerS`, K */
    temperatureK: number;
    rateKPerS: number;
    /** Rise of the midpoint with each decade of heating rate, K */
    risePerDecadeK: number;
    /** Width of the logistic step, K */
    widthK: number;
    /** J/(kg K) */
    stepJPerKgK: number;
  };
}

export interface SimulatedInstrument {
  /** Measured minus true temperature at zero rate, K */
  offsetK: number;
  /** The part of the lag by which the sensor leads the sample, s */
  shiftS: number;
  /** The part of the lag that is a first-order response of the signal, s */
  responseS: number;
  exotherm: ExothermDirection;
  /** One standard deviation of white noise, as a fraction of the peak height */
  noiseFraction: number;
  /** Baseline drift over the whole scan as fractions of the peak height: linear·s + quadratic·s², s = 0 … 1 */
  drift: { linear: number; quadratic: number };
  /** Time between rows, s */
  stepS: number;
}

/** Source of noise: standard normal draws (every random draw comes from a seeded generator passed in). */
export interface NoiseSource {
  normal(): number;
}

export interface SimulatedScan {
  /** Columns as an instrument would write them. Heat flow in W with the instrument's sign. */
  timeS: Float64Array;
  temperatureK: Float64Array;
  heatFlowW: Float64Array;
  /** What nobody sees in a real scan */
  sampleK: Float64Array;
  conversion: Float64Array;
  ratePerS: Float64Array;
}

/**
 * A scan of a material on an instrument: conversion along the sample's temperature, its heat flow and the glass-transition
 * step seen through the first-order response τ_r dφ/dt + φ = φ_true, then drift, noise and sign. Without a noise source
 * the scan is noise-free.
 */
export function simulateScan(
  material: SimulatedMaterial,
  massKg: number,
  instrument: SimulatedInstrument,
  programme: Programme,
  noise?: NoiseSource,
): SimulatedScan {
  const follower = followProgramme(programme, instrument.shiftS);
  const startS = programme[0][0];
  const durationS = programme[programme.length - 1][0] - startS;
  const rows = Math.floor(durationS / instrument.stepS + 1e-9) + 1;
  const timeS = Float64Array.from({ length: rows }, (_, i) => startS + i * instrument.stepS);
  const sampleK = timeS.map((t) => follower.sampleK(t));
  const { conversion, ratePerS } = simulateConversion(material.law, material.avramiExponent, timeS, follower.sampleK);
  const event = ratePerS.map((r) => r * material.enthalpyJPerKg * massKg);
  const trueFlow = event.map((w, i) => w - glassStep(material, massKg, sampleK, timeS, i));
  const seen = applyResponse(timeS, trueFlow, instrument.responseS);
  const height = event.reduce((a, b) => Math.max(a, b), 0);
  const sign = instrument.exotherm === 'up' ? 1 : -1;
  const { linear, quadratic } = instrument.drift;
  const heatFlowW = seen.map((w, i) => {
    const s = (timeS[i] - startS) / durationS;
    const disturbance = linear * s + quadratic * s * s + (noise ? noise.normal() * instrument.noiseFraction : 0);
    return sign * (w + height * disturbance);
  });
  const temperatureK = timeS.map((t) => follower.furnaceK(t) + instrument.offsetK);
  return { timeS, temperatureK, heatFlowW, sampleK, conversion, ratePerS };
}

/** Endothermic heat flow of the glass-transition step at row i, W. */
function glassStep(
  material: SimulatedMaterial,
  massKg: number,
  sampleK: Float64Array,
  timeS: Float64Array,
  i: number,
): number {
  const glass = material.glassTransition;
  if (!glass) return 0;
  const j = Math.max(i, 1);
  const rate = (sampleK[j] - sampleK[j - 1]) / (timeS[j] - timeS[j - 1]);
  if (!(rate > 0)) return 0;
  const midpoint = glass.temperatureK + glass.risePerDecadeK * Math.log10(rate / glass.rateKPerS);
  return (massKg * glass.stepJPerKgK * rate) / (1 + Math.exp(-(sampleK[i] - midpoint) / glass.widthK));
}

/**
 * First-order response to a signal taken as straight between rows: exact for that, at rest with the signal at the start.
 * Over one step h, with x = h/τ: y ← y e^(−x) + s₀ (1 − e^(−x)) + (s₁ − s₀) (1 − (1 − e^(−x))/x).
 */
export function applyResponse(timeS: Float64Array, signal: Float64Array, responseS: number): Float64Array {
  if (responseS === 0) return signal.slice();
  const out = new Float64Array(signal.length);
  out[0] = signal[0];
  for (let i = 1; i < signal.length; i++) {
    const x = (timeS[i] - timeS[i - 1]) / responseS;
    const gained = -Math.expm1(-x);
    out[i] = out[i - 1] * (1 - gained) + signal[i - 1] * gained + (signal[i] - signal[i - 1]) * (1 - gained / x);
  }
  return out;
}

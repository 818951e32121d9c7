import type { Programme } from './programme.ts';
import type { RateLaw } from './rate-laws.ts';
import type { TemperatureLaw } from './temperature-laws.ts';

/** One transformation; several run side by side. */
export interface ThermalEvent {
  temperature: TemperatureLaw;
  rate: RateLaw;
  /** J/kg, > 0 is exothermic */
  enthalpyJPerKg: number;
}

export interface SampleModel {
  events: ThermalEvent[];
  /** Heat capacity of the glass at `referenceK` and its slope with temperature. */
  heatCapacity?: { jPerKgK: number; slopeJPerKgK2: number; referenceK: number };
  /** Step of the heat capacity at the glass transition of THIS scan (it moves with rate), with the overshoot of an aged glass. */
  glassTransition?: { temperatureK: number; widthK: number; stepJPerKgK: number; overshootJPerKg: number };
  /** Heat capacity of the crystal minus that of the liquid, J/(kg K); counts with the mean conversion of the events. */
  crystalStepJPerKgK?: number;
  /** Melting of what has crystallised: enthalpy J/kg, spread like a logistic of this width. */
  melting?: { temperatureK: number; widthK: number; enthalpyJPerKg: number };
}

export interface InstrumentModel {
  /** K: reported minus programme temperature */
  offsetK: number;
  /** s: first-order lag of the sample's temperature behind the programme, dTs/dt = (Tp − Ts)/shift */
  shiftS: number;
  /** s: first-order response of the signal, response dφm/dt = φ − φm */
  responseS: number;
}

export interface ScanModel {
  sample: SampleModel;
  instrument: InstrumentModel;
  programme: Programme;
  massKg: number;
  /**
   * Heat that the sample stores before it leaves: θ' = −θ/contact + (ΔH/c_p) dα/dt warms the sample, and the signal is
   * what leaves it, m c_p θ/contact. The contact smears the signal a second time, as it does in the laboratory.
   */
  selfHeating?: { contactS: number; heatCapacityJPerKgK: number };
}

/** Noise-free answer at the asked times; one entry an event in the doubled arrays. Heat flow: exotherm up. */
export interface ScanSolution {
  timeS: Float64Array;
  programmeK: Float64Array;
  /** Where the sample really is */
  sampleK: Float64Array;
  conversion: Float64Array[];
  ratePerS: Float64Array[];
  /** W: the events' share of the signal, after the response */
  eventW: Float64Array;
  /** W: the whole signal, after the response */
  signalW: Float64Array;
}

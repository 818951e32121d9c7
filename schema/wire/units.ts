/** Physical constants and the conversions that cross the boundary. Inside the code everything is SI. */

/** Molar gas constant, J/(mol K): exact since the 2019 SI (CODATA 2018). */
export const GAS_CONSTANT = 8.31446261815324;
/** 0 °C in K (exact). */
export const ZERO_CELSIUS_K = 273.15;

export const kelvinFromCelsius = (celsius: number): number => celsius + ZERO_CELSIUS_K;
export const celsiusFromKelvin = (kelvin: number): number => kelvin - ZERO_CELSIUS_K;
export const kelvinPerSecond = (kelvinPerMinute: number): number => kelvinPerMinute / 60;
export const kelvinPerMinute = (kelvinPerS: number): number => kelvinPerS * 60;

import { effect, signal } from '@preact/signals';
import type { Units } from '../format.ts';

const KEY = 'ratespan-units';

function storedUnits(): Units {
  const units: Units = { temperature: '°C', rate: 'K/min' };
  try {
    const stored = JSON.parse(localStorage.getItem(KEY) ?? '{}');
    if (stored.temperature === 'K') units.temperature = 'K';
    if (stored.rate === 'K/s') units.rate = 'K/s';
  } catch {
    // Storage may be closed to the page or hold something else: the units above then stand.
  }
  return units;
}

export const units = signal<Units>(storedUnits());

effect(() => {
  const text = JSON.stringify(units.value);
  try {
    localStorage.setItem(KEY, text);
  } catch {
    // Not remembered then; the switch still works.
  }
});

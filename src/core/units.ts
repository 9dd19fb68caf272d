/** Pascals in one conventional millimetre of mercury (13 595.1 kg/m³ × 9.80665 m/s² × 1 mm; ISO 80000-4). */
export const MMHG = 133.322387415;

/** Every unit an edge may use: the suffix of a key, and what one of it is in SI. */
export const UNITS = {
  m: { quantity: 'length', factor: 1 },
  mm: { quantity: 'length', factor: 1e-3 },
  um: { quantity: 'length', factor: 1e-6 },
  Pa: { quantity: 'pressure', factor: 1 },
  kPa: { quantity: 'pressure', factor: 1e3 },
  mmHg: { quantity: 'pressure', factor: MMHG },
  m3_s: { quantity: 'flow', factor: 1 },
  mL_min: { quantity: 'flow', factor: 1e-6 / 60 },
  uL_min: { quantity: 'flow', factor: 1e-9 / 60 },
  nL_min: { quantity: 'flow', factor: 1e-12 / 60 },
  Pa_s: { quantity: 'viscosity', factor: 1 },
  mPa_s: { quantity: 'viscosity', factor: 1e-3 },
  W_m3: { quantity: 'maintenance', factor: 1 },
  kg_m3: { quantity: 'density', factor: 1 },
  deg: { quantity: 'angle', factor: Math.PI / 180 },
} as const;

export type Unit = keyof typeof UNITS;
export type Quantity = (typeof UNITS)[Unit]['quantity'];

/** Value in SI of a number given in a unit. Divides where the inverse is a whole number, so that 12 mm is 0.012 m exactly. */
export function toSi(value: number, unit: Unit): number {
  const factor = UNITS[unit].factor;
  const inverse = Math.round(1 / factor);
  return factor < 1 && unit !== 'deg' && 1 / inverse === factor ? value / inverse : value * factor;
}

/** Number in a unit of a value in SI. */
export function fromSi(value: number, unit: Unit): number {
  const factor = UNITS[unit].factor;
  const inverse = Math.round(1 / factor);
  return factor < 1 && unit !== 'deg' && 1 / inverse === factor ? value * inverse : value / factor;
}

import { type Quantity, toSi, UNITS, type Unit } from '../../core/units.ts';

const NUMBER = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;

/** The number a text holds, or NaN where it holds none (empty, hexadecimal, infinite and such count as none). */
export function parseReal(text: string): number {
  const trimmed = text.trim();
  return NUMBER.test(trimmed) ? Number(trimmed) : Number.NaN;
}

/** Shortest text that parseReal turns back into the same number, bit for bit. */
export function printReal(value: number): string {
  return value === 0 && 1 / value < 0 ? '-0' : String(value);
}

/** Unit that a column's name ends in, e.g. `mm` of `x_mm`; null where the name is not base and a unit of the quantity. */
export function unitOfName(name: string, base: string, quantity: Quantity): Unit | null {
  if (!name.startsWith(`${base}_`)) return null;
  const suffix = name.slice(base.length + 1);
  return suffix in UNITS && UNITS[suffix as Unit].quantity === quantity ? (suffix as Unit) : null;
}

/** Turns a column into SI in place. */
export function columnToSi(column: Float64Array, unit: Unit): void {
  if (UNITS[unit].factor === 1) return;
  for (let i = 0; i < column.length; i++) column[i] = toSi(column[i]!, unit);
}

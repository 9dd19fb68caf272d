import { type FlowField, fromSi, type TreeRecord, toSi } from './library.ts';

/** A unit that numbers are shown in. */
export interface Shown {
  readonly unit: string;
  /** SI to shown. */
  readonly from: (si: number) => number;
  /** Shown to SI. */
  readonly to: (shown: number) => number;
}

const named = (unit: string, suffix: Parameters<typeof fromSi>[1]): Shown => ({
  unit,
  from: (si) => fromSi(si, suffix),
  to: (shown) => toSi(shown, suffix),
});
const scaled = (unit: string, size: number): Shown => ({
  unit,
  from: (si) => si / size,
  to: (shown) => shown * size,
});

export const MICROMETRES = named('µm', 'um');
export const MMHG = named('mmHg', 'mmHg');
const FLOWS = [named('mL/min', 'mL_min'), named('µL/min', 'uL_min'), named('nL/min', 'nL_min')];
const SPEEDS = [scaled('m/s', 1), scaled('mm/s', 1e-3), scaled('µm/s', 1e-6)];
const TIMES = [scaled('s', 1), scaled('ms', 1e-3), scaled('µs', 1e-6)];
const PRESSURES = [scaled('kPa', 1e3), scaled('Pa', 1), scaled('mPa', 1e-3)];
const NONE = scaled('', 1);

/** The coarsest of some units in which a value is at least 1; the finest where there is none. */
function fitting(units: readonly Shown[], largest: number): Shown {
  return units.find((unit) => unit.from(largest) >= 1) ?? units.at(-1)!;
}

export const flowUnit = (largest: number): Shown => fitting(FLOWS, largest);
export const speedUnit = (largest: number): Shown => fitting(SPEEDS, largest);
export const timeUnit = (largest: number): Shown => fitting(TIMES, largest);
export const shearUnit = (largest: number): Shown => fitting(PRESSURES.slice(1), largest);

export type QuantityId =
  | 'radius'
  | 'flow'
  | 'pressure'
  | 'velocity'
  | 'wallShear'
  | 'reynolds'
  | 'transit'
  | 'order'
  | 'tree';

/** Something a vessel can be coloured by. */
export interface Quantity {
  readonly id: QuantityId;
  readonly label: string;
  /** `tube`: one value a vessel. `node`: one at each end, joined by a straight line along the vessel. */
  readonly at: 'tube' | 'node';
  /** Whole numbers, each a colour of its own. */
  readonly counted: boolean;
  /** Starts on a log scale. */
  readonly log: boolean;
  /** Unit for a largest value in SI. */
  readonly shown: (largest: number) => Shown;
  /** (n) one value a row, in SI, or null where the file does not hold it. */
  readonly values: (record: TreeRecord) => ArrayLike<number> | null;
}

const solved =
  (column: Exclude<keyof FlowField, 'forest'>): Quantity['values'] =>
  (record) =>
    record.field === null ? null : record.field[column];

const tube = { at: 'tube', counted: false, log: true } as const;
const node = { at: 'node', counted: false, log: false } as const;
const counted = { at: 'tube', counted: true, log: false, shown: () => NONE } as const;

export const QUANTITIES: readonly Quantity[] = [
  { id: 'radius', label: 'Radius', ...tube, shown: () => MICROMETRES, values: (record) => record.forest.radius },
  { id: 'flow', label: 'Flow', ...tube, shown: flowUnit, values: (record) => record.forest.flow },
  { id: 'pressure', label: 'Pressure', ...node, shown: () => MMHG, values: solved('pressure') },
  { id: 'velocity', label: 'Mean velocity', ...tube, shown: speedUnit, values: solved('velocity') },
  { id: 'wallShear', label: 'Wall shear', ...tube, log: false, shown: shearUnit, values: solved('wallShear') },
  { id: 'reynolds', label: 'Reynolds number', ...tube, shown: () => NONE, values: solved('reynolds') },
  { id: 'transit', label: 'Transit time', ...node, shown: timeUnit, values: solved('transit') },
  { id: 'order', label: 'Strahler order', ...counted, values: (record) => record.order },
  { id: 'tree', label: 'Tree', ...counted, values: (record) => record.forest.tree },
];

/** The quantity of an id; radius where there is none. */
export function quantityOf(id: string): Quantity {
  return QUANTITIES.find((quantity) => quantity.id === id) ?? QUANTITIES[0]!;
}

/** Ends of a column. */
export interface Extent {
  readonly least: number;
  readonly largest: number;
  /** Least value above 0; 0 where there is none. */
  readonly leastPositive: number;
}

/** Least, largest and least positive value of a column; roots count, as they repeat their vessel's value. */
export function extentOf(values: ArrayLike<number>): Extent {
  let least = Infinity;
  let largest = -Infinity;
  let leastPositive = Infinity;
  for (let i = 0; i < values.length; i++) {
    const value = values[i]!;
    if (value < least) least = value;
    if (value > largest) largest = value;
    if (value > 0 && value < leastPositive) leastPositive = value;
  }
  return { least, largest, leastPositive: leastPositive === Infinity ? 0 : leastPositive };
}

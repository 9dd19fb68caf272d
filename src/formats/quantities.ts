import type { Quantity } from '../core/units.ts';

/** A column of a tree file: the base of its name, the unit we write, and the key of its value in memory. */
export interface ColumnSpec<Key extends string> {
  readonly key: Key;
  readonly base: string;
  /** Suffix after the base as written, or '' for numbers without a unit. */
  readonly unit: string;
  readonly quantity: Quantity | null;
}

export type VesselKey = 'viscosity' | 'velocity' | 'wallShear' | 'reynolds' | 'haematocrit';
export type NodeKey = 'pressure' | 'transit';

/** What a flow solution adds to a vessel. Velocity has one spelling: its unit is no key's unit. */
export const VESSEL_COLUMNS = [
  { key: 'viscosity', base: 'viscosity', unit: 'Pa_s', quantity: 'viscosity' },
  { key: 'velocity', base: 'velocity_m_s', unit: '', quantity: null },
  { key: 'wallShear', base: 'wall_shear', unit: 'Pa', quantity: 'pressure' },
  { key: 'reynolds', base: 'reynolds', unit: '', quantity: null },
  { key: 'haematocrit', base: 'haematocrit', unit: '', quantity: null },
] as const satisfies readonly ColumnSpec<VesselKey>[];

/** What a flow solution adds to a node. */
export const NODE_COLUMNS = [
  { key: 'pressure', base: 'pressure', unit: 'Pa', quantity: 'pressure' },
  { key: 'transit', base: 'transit_s', unit: '', quantity: null },
] as const satisfies readonly ColumnSpec<NodeKey>[];

/** What a terminal serves, where it was measured: m³, of vessels; vessels that end in no terminal have 0. */
export const TERRITORY = 'territory_m3';

/** Name of a column as written. */
export function columnName(column: { readonly base: string; readonly unit: string }): string {
  return column.unit === '' ? column.base : `${column.base}_${column.unit}`;
}

import type { TreeRecord } from '../tree/forest.ts';

/** Something that is compared vessel by vessel, and how much of a difference is none. */
export interface Quantity {
  /** Key of its tolerance, with unit: `_rel` is relative to the larger of the two values. */
  readonly key: string;
  readonly title: string;
  /** Unit of values and absolute differences: SI, but µm for positions; `1` for plain numbers. */
  readonly unit: string;
  /** Is the tolerance on the relative difference? */
  readonly relative: boolean;
  /** Default tolerance: above what a text format with nine digits loses, below anything that matters. */
  readonly tolerance: number;
  /** What a file must hold to hold it. */
  readonly part: 'positions' | 'radii' | 'flows' | 'orders' | 'flow solution' | 'territories';
  /** Does it belong to nodes (and so to roots too), or to tubes? */
  readonly at: 'node' | 'tube';
  /** Column of a record, or null where the record has none. */
  readonly column: (record: TreeRecord) => ArrayLike<number> | null;
}

/** All that is compared, in the order in which differences are named. Positions are points: their column is (3n) m. */
export const QUANTITIES: readonly Quantity[] = [
  {
    key: 'position_um',
    part: 'positions',
    title: 'position',
    unit: 'µm',
    relative: false,
    tolerance: 1e-3,
    at: 'node',
    column: (record) => record.forest.position,
  },
  {
    key: 'radius_rel',
    part: 'radii',
    title: 'radius',
    unit: 'm',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.forest.radius,
  },
  {
    key: 'flow_rel',
    part: 'flows',
    title: 'flow',
    unit: 'm³/s',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.forest.flow,
  },
  {
    key: 'order',
    part: 'orders',
    title: 'Strahler order',
    unit: '1',
    relative: false,
    tolerance: 0,
    at: 'tube',
    column: (record) => record.order,
  },
  {
    key: 'pressure_Pa',
    part: 'flow solution',
    title: 'pressure',
    unit: 'Pa',
    relative: false,
    tolerance: 1e-3,
    at: 'node',
    column: (record) => record.field?.pressure ?? null,
  },
  {
    key: 'transit_rel',
    part: 'flow solution',
    title: 'transit time',
    unit: 's',
    relative: true,
    tolerance: 1e-6,
    at: 'node',
    column: (record) => record.field?.transit ?? null,
  },
  {
    key: 'viscosity_rel',
    part: 'flow solution',
    title: 'viscosity',
    unit: 'Pa·s',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.field?.viscosity ?? null,
  },
  {
    key: 'velocity_rel',
    part: 'flow solution',
    title: 'velocity',
    unit: 'm/s',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.field?.velocity ?? null,
  },
  {
    key: 'wall_shear_rel',
    part: 'flow solution',
    title: 'wall shear',
    unit: 'Pa',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.field?.wallShear ?? null,
  },
  {
    key: 'reynolds_rel',
    part: 'flow solution',
    title: 'Reynolds number',
    unit: '1',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.field?.reynolds ?? null,
  },
  {
    key: 'haematocrit',
    part: 'flow solution',
    title: 'haematocrit',
    unit: '1',
    relative: false,
    tolerance: 1e-9,
    at: 'tube',
    column: (record) => record.field?.haematocrit ?? null,
  },
  {
    key: 'territory_rel',
    part: 'territories',
    title: 'territory',
    unit: 'm³',
    relative: true,
    tolerance: 1e-6,
    at: 'tube',
    column: (record) => record.territory ?? null,
  },
];

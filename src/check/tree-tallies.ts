import type { Spec } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import { Tally, type TallyHead } from './result.ts';
import { vesselNamer } from './rows.ts';

export interface TreeTallies {
  readonly structure: Tally;
  readonly orders: Tally;
  readonly containment: Tally;
  readonly clearance: Tally;
  readonly separation: Tally;
  readonly angle: Tally;
  readonly length: Tally;
  readonly law: Tally;
  readonly sizing: Tally;
  readonly terminalPressure: Tally;
  readonly conservation: Tally;
  readonly inlet: Tally;
  readonly shares: Tally;
  readonly territory: Tally;
  readonly terminals: Tally;
  readonly pressure: Tally;
  readonly viscosity: Tally;
  readonly velocity: Tally;
  readonly wallShear: Tally;
  readonly transit: Tally;
  readonly reynolds: Tally;
  readonly cost: Tally;
}

/** The promises of a tree with their limits, before anything was looked at. */
export function createTreeTallies(record: TreeRecord, spec: Spec | null, size: number, cap: number): TreeTallies {
  const nameOf = vesselNamer(record);
  const { radius } = record.forest;
  const slack = 1e-9 * size;
  const tally = (
    id: string,
    title: string,
    limits: Pick<TallyHead, 'sense' | 'limit' | 'unit' | 'tolerance'>,
    describe: TallyHead['describe'],
  ) => new Tally({ id, title, ...limits, nameOf, describe, cap });
  /** A relative difference that must stay below a limit. */
  const relative = (id: string, title: string, limit: number, what: string) =>
    tally(
      id,
      title,
      { sense: 'at-most', limit, unit: '1' },
      (value) => `${what} by ${value.toExponential(3)}, allowed ${limit}`,
    );
  const least = (limit: number, unit: string, tolerance = 0) =>
    ({ sense: 'at-least', limit, unit, tolerance }) as const;
  const gap = spec?.clearance.gap ?? 0;
  const angle = spec?.junctions.minAngle ?? 0;
  return {
    structure: tally(
      'structure',
      'rows are trees in preorder, all numbers finite and positive',
      { sense: 'at-most', limit: 0, unit: '1' },
      () => 'is not part of a tree',
    ),
    orders: tally(
      'orders',
      'Strahler orders are right',
      { sense: 'at-most', limit: 0, unit: '1' },
      (_, row) => `order ${record.order[row]} is wrong`,
    ),
    containment: tally(
      'containment',
      'every vessel lies in the tissue',
      least(0, 'm', slack),
      (value, row) => `lumen surface ${micrometres(-value)} outside the tissue (radius ${micrometres(radius[row]!)})`,
    ),
    clearance: tally(
      'clearance',
      'vessels that share no node keep the gap',
      least(gap, 'm', slack),
      (value, _, other) => `wall to wall ${micrometres(value)} from ${nameOf(other)}, asked ${micrometres(gap)}`,
    ),
    separation: tally(
      'junction-separation',
      'vessels that share a node part before either ends',
      least(1, '1', 1e-9),
      (value, _, other) => `far end is ${value.toPrecision(6)} radius sums from the axis of ${nameOf(other)}, needed 1`,
    ),
    angle: tally(
      'junction-angle',
      'vessels leave a node at no less than the asked angle',
      least(angle, 'rad', 1e-9),
      (value, _, other) => `${degrees(value)} to ${nameOf(other)}, asked ${degrees(angle)}`,
    ),
    length: tally(
      'vessel-length',
      'every vessel is as long as its junctions need',
      least(1, '1', 1e-9),
      (value) => `length is ${value.toPrecision(6)} of what its two ends need`,
    ),
    law: relative('junction-law', 'every junction obeys the radius law', 1e-9, 'radii of the junction miss the law'),
    sizing: relative('sizing', 'radii obey the sizing rule', 1e-9, 'the sizing rule is missed'),
    terminalPressure: relative(
      'terminal-pressure',
      'terminals have the asked pressure',
      1e-6,
      'terminal pressure is off',
    ),
    conservation: relative(
      'conservation',
      'blood is conserved at every node',
      1e-10,
      "of the inlet's flow goes astray",
    ),
    inlet: relative('inlet-flow', 'each tree carries the asked flow', 1e-9, 'flow of the tree is off'),
    shares: relative('terminal-flow', 'terminals have their share of the flow', 1e-9, 'flow of the terminal is off'),
    territory: tally(
      'territory',
      'terminals have the flow that the tissue nearest to them demands',
      { sense: 'at-most', limit: 1, unit: '1' },
      (value) =>
        `${value.toPrecision(3)} times the error allowed lies between its territory and the one measured again`,
    ),
    terminals: tally(
      'terminals',
      'all terminals asked for are there',
      { sense: 'at-most', limit: 0, unit: '1' },
      (value) => `${value} terminals off`,
    ),
    pressure: relative('pressure', 'pressures are those of the tree', 1e-9, 'pressure is off, over the whole drop,'),
    viscosity: relative('viscosity', 'viscosities are those asked for', 1e-9, 'viscosity is off'),
    velocity: relative('velocity', 'velocities follow from flow and radius', 1e-9, 'velocity is off'),
    wallShear: relative('wall-shear', 'wall shear follows from flow and radius', 1e-9, 'wall shear is off'),
    transit: relative(
      'transit',
      'transit times follow from volume and flow',
      1e-9,
      'transit is off, over the longest,',
    ),
    reynolds: relative('reynolds', 'Reynolds numbers follow from flow and radius', 1e-9, 'Reynolds number is off'),
    cost: relative('cost', 'the cost is the cost', 1e-9, 'cost is off'),
  };
}

function micrometres(value: number): string {
  return `${(1e6 * value).toPrecision(6)} µm`;
}

function degrees(value: number): string {
  return `${((180 / Math.PI) * value).toPrecision(6)}°`;
}

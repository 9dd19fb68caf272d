import { InvariantError } from '../core/errors.ts';
import type { Reals } from '../core/reals.ts';
import { meanVelocity, reynolds, tubeResistance, wallShear } from '../physics/poiseuille.ts';
import type { FlowField, Forest, TreeKind } from '../tree/forest.ts';
import { tubeLength } from '../tree/vessels.ts';
import { type Viscosity, viscosityColumn } from './viscosity.ts';

export interface FlowOptions {
  /** (trees) Pa at each root. */
  readonly rootPressures: ArrayLike<number>;
  /** Pa·s */
  readonly viscosity: Viscosity;
  /** kg/m³; enters the Reynolds number alone. */
  readonly density: number;
  /** (n) discharge haematocrit, fraction; 0 where left out. */
  readonly haematocrit?: Reals | undefined;
  /** (n) m that resist flow, > 0 (see effective-lengths.ts); those of the axes where left out. Transit keeps the axes. */
  readonly lengths?: Reals | undefined;
}

/**
 * Solves pressure and all that follows from it on trees whose flows are given.
 *
 * On a tree with known terminal flows nothing is left to solve but sums along the way from the root, so the answer is
 * exact to rounding. Pressure falls along the blood: away from a supply tree's root, towards a draining tree's.
 *
 * @param kinds one a tree
 * @throws InvariantError where kinds or root pressures are not one a tree, or a viscosity is not positive
 * Cost: O(n)
 */
export function solveFlow(forest: Forest, kinds: readonly TreeKind[], options: FlowOptions): FlowField {
  const n = forest.count;
  const trees = forest.treeStart.length - 1;
  if (kinds.length !== trees || options.rootPressures.length !== trees) {
    throw new InvariantError(
      `solveFlow: got ${kinds.length} kinds and ${options.rootPressures.length} root pressures for ${trees} trees`,
    );
  }
  if (options.haematocrit !== undefined && options.haematocrit.length !== n) {
    throw new InvariantError(`solveFlow: got ${options.haematocrit.length} haematocrits for ${n} rows`);
  }
  if (options.lengths !== undefined && options.lengths.length !== n) {
    throw new InvariantError(`solveFlow: got ${options.lengths.length} lengths for ${n} rows`);
  }
  const viscosity = viscosityColumn(forest, options.viscosity);
  const pressure = new Float64Array(n);
  const transit = new Float64Array(n);
  const velocity = new Float64Array(n);
  const shear = new Float64Array(n);
  const re = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const parent = forest.parent[i]!;
    const r = forest.radius[i]!;
    const q = forest.flow[i]!;
    const mu = viscosity[i]!;
    velocity[i] = meanVelocity(q, r);
    shear[i] = wallShear(q, r, mu);
    re[i] = reynolds(q, r, mu, options.density);
    if (parent < 0) {
      pressure[i] = options.rootPressures[forest.tree[i]!]!;
      continue;
    }
    const length = tubeLength(forest, i);
    const drop = tubeResistance(options.lengths?.[i] ?? length, r, mu) * q;
    pressure[i] = pressure[parent]! + (kinds[forest.tree[i]!] === 'drain' ? drop : -drop);
    transit[i] = transit[parent]! + length / velocity[i]!;
  }
  const haematocrit = options.haematocrit === undefined ? new Float64Array(n) : options.haematocrit.slice();
  return { forest, pressure, transit, viscosity, velocity, wallShear: shear, reynolds: re, haematocrit };
}

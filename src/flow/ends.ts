import { InvariantError } from '../core/errors.ts';
import { tubeResistance } from '../physics/poiseuille.ts';
import { listChildren } from '../tree/children.ts';
import type { Forest } from '../tree/forest.ts';
import { tubeLength } from '../tree/vessels.ts';
import { measureImbalance } from './balance.ts';
import { type Viscosity, viscosityColumn } from './viscosity.ts';

/** Flow and pressure between ends of given pressure. */
export interface EndsSolution {
  /** (n) m³/s, positive away from the root, so negative throughout a draining tree; a root repeats its child's. */
  readonly flow: Float64Array;
  /** (n) Pa at the node; ends carry what the sweep gave, not what was asked. */
  readonly pressure: Float64Array;
  /** How well the answer fits, recomputed from it. */
  readonly residual: {
    /** Largest relative imbalance of a node: |in − out| over the largest flow of its tree. */
    readonly balance: number;
    /** Largest |pressure − asked| at a terminal over the largest pressure difference between ends of its tree. */
    readonly pressure: number;
  };
  /** Rows whose flow runs against that of their tree's root tube, or not at all. */
  readonly reversed: number;
}

/**
 * Solves flow and pressure of trees whose pressures are given at all ends.
 *
 * Seen from its near end, a tube with everything beyond it is a resistance to a source of some pressure (Thévenin).
 * A sweep to the roots reduces every subtree to that pair; a sweep back shares the flow out. The second sweep divides
 * a flow between children instead of subtracting pressures, so no digits are lost where drops are small beside the
 * pressures, and nodes balance to rounding by construction.
 *
 * @param rootPressures     (trees) Pa
 * @param terminalPressures (n) Pa; only rows without children are read
 * @param viscosity         Pa·s
 * @throws InvariantError where there is not one root pressure a tree, an end's pressure is not finite, or a terminal
 *         tube has no length
 * Source: Kirchhoff's laws; elimination from the leaves fills nothing in on a tree.
 * Cost:   O(n), exact to rounding.
 */
export function solveWithEnds(
  forest: Forest,
  rootPressures: ArrayLike<number>,
  terminalPressures: ArrayLike<number>,
  viscosity: Viscosity,
): EndsSolution {
  const n = forest.count;
  const trees = forest.treeStart.length - 1;
  if (rootPressures.length !== trees || terminalPressures.length !== n) {
    throw new InvariantError(
      `solveWithEnds: got ${rootPressures.length} root and ${terminalPressures.length} terminal pressures for ${trees} trees of ${n} rows`,
    );
  }
  const mu = viscosityColumn(forest, viscosity);
  const children = listChildren(forest);
  const resistance = new Float64Array(n);
  // Of a tube and all beyond it, seen from its near end; pressures are relative to the root's.
  const conductance = new Float64Array(n);
  const source = new Float64Array(n);
  // Of a node: conductance of all beyond it, and its source less its best-conducting child's.
  const beyond = new Float64Array(n);
  const shift = new Float64Array(n);
  const best = new Int32Array(n);
  for (let i = n - 1; i >= 0; i--) {
    const from = children.start[i]!;
    const to = children.start[i + 1]!;
    if (from === to) source[i] = terminalPressures[i]! - rootPressures[forest.tree[i]!]!;
    else {
      let sum = 0;
      let top = children.list[from]!;
      for (let k = from; k < to; k++) {
        const child = children.list[k]!;
        sum += conductance[child]!;
        if (conductance[child]! > conductance[top]!) top = child;
      }
      // Sums of differences: a thick child's own source would drown what its thin sibling does to it.
      let pull = 0;
      for (let k = from; k < to; k++) {
        const child = children.list[k]!;
        pull += conductance[child]! * (source[child]! - source[top]!);
      }
      beyond[i] = sum;
      best[i] = top;
      shift[i] = pull / sum;
      source[i] = source[top]! + shift[i]!;
    }
    if (forest.parent[i]! < 0) continue;
    const own = tubeResistance(tubeLength(forest, i), forest.radius[i]!, mu[i]!);
    resistance[i] = own;
    conductance[i] = from === to ? 1 / own : 1 / (own + 1 / beyond[i]!);
    if (!(conductance[i]! < Infinity) || !Number.isFinite(source[i]!)) {
      throw new InvariantError(
        `solveWithEnds: row ${i} has resistance ${own} Pa·s/m³ and end pressure ${source[i]} Pa above its root's`,
      );
    }
  }
  const flow = new Float64Array(n);
  const pressure = new Float64Array(n);
  let worst = 0;
  let reversed = 0;
  for (let t = 0; t < trees; t++) {
    const root = forest.treeStart[t]!;
    const end = forest.treeStart[t + 1]!;
    const base = rootPressures[t]!;
    let least = 0;
    let most = 0;
    let off = 0;
    flow[root] = -conductance[root + 1]! * source[root + 1]!;
    for (let i = root + 1; i < end; i++) {
      const parent = forest.parent[i]!;
      // A share of the parent's flow, and what the children exchange because their sources differ.
      const apart = shift[parent]! - (source[i]! - source[best[parent]!]!);
      flow[i] = parent === root ? flow[root]! : conductance[i]! * (flow[parent]! / beyond[parent]! + apart);
      pressure[i] = pressure[parent]! - flow[i]! * resistance[i]!;
      if (!(flow[i]! * flow[root]! > 0)) reversed++;
      if (beyond[i] === 0) {
        const gap = Math.abs(pressure[i]! - source[i]!);
        if (gap > off) off = gap;
        if (source[i]! < least) least = source[i]!;
        if (source[i]! > most) most = source[i]!;
      }
    }
    for (let i = root; i < end; i++) pressure[i]! += base;
    if (most > least && off / (most - least) > worst) worst = off / (most - least);
  }
  return { flow, pressure, residual: { balance: measureImbalance(forest, flow), pressure: worst }, reversed };
}

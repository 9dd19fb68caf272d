import type { Random } from '../core/random.ts';
import type { TreeSpec } from '../spec/types.ts';

/**
 * Order in which explicit points are served: each next point is the one farthest from the inlet and all before it, so
 * that the tree's frame comes first; or shuffled where a random stream is given.
 *
 * @param first points to be served before all others
 * @returns row of the spec's point at each place
 * Cost: O(n²) up to 20,000 points; beyond that they keep the spec's order.
 */
export function farthestFirst(tree: TreeSpec, random: Random | null, first: readonly number[]): number[] {
  if (tree.terminals.by !== 'points') return [];
  const { points } = tree.terminals;
  const n = points.length;
  const order = [...first];
  const taken = new Uint8Array(n);
  for (const k of first) taken[k] = 1;
  const rest: number[] = [];
  for (let k = 0; k < n; k++) if (taken[k] === 0) rest.push(k);
  if (random !== null) {
    for (let i = rest.length - 1; i > 0; i--) {
      const j = Math.floor(random.next() * (i + 1));
      const swap = rest[i]!;
      rest[i] = rest[j]!;
      rest[j] = swap;
    }
    return order.concat(rest);
  }
  if (n > 20_000) return order.concat(rest);
  const nearest = new Float64Array(n).fill(Infinity);
  const meet = (x: readonly [number, number, number]) => {
    for (const k of rest) {
      const q = points[k]!;
      const d = (q[0] - x[0]) * (q[0] - x[0]) + (q[1] - x[1]) * (q[1] - x[1]) + (q[2] - x[2]) * (q[2] - x[2]);
      if (d < nearest[k]!) nearest[k] = d;
    }
  };
  meet(tree.inlet.position);
  for (const k of first) meet(points[k]!);
  for (let i = 0; i < rest.length; i++) {
    let best = -1;
    for (const k of rest) if (taken[k] === 0 && (best < 0 || nearest[k]! > nearest[best]!)) best = k;
    taken[best] = 1;
    order.push(best);
    meet(points[best]!);
  }
  return order;
}

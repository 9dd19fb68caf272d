import type { Forest } from '../tree/forest.ts';
import { nodeToSegment } from './axis-distance.ts';
import type { Tally } from './result.ts';
import type { ChildLists } from './rows.ts';

/**
 * Least radius of a ball round a node on whose sphere two tubes leave disjoint circles.
 *
 * A tube of radius r through the centre cuts the sphere of radius ρ in a circle of angular radius asin(r/ρ). The circles
 * touch where asin(a/ρ) + asin(b/ρ) = θ: a triangle with sides a, b and the angle π − θ between them has circumscribed
 * diameter ρ, so ρ = c / sin θ with c² = a² + b² + 2ab cos θ. That needs both angles acute. Where cos θ ≤ −b/a (b the
 * thinner tube) the circles are apart as soon as the sphere is as wide as the thicker tube: ρ = a.
 *
 * @param a, b  m, > 0
 * @param angle rad between the tubes, in [0, π]; 0 gives Infinity
 * Source: derived here.
 */
export function junctionReach(a: number, b: number, angle: number): number {
  const wide = Math.max(a, b);
  const thin = Math.min(a, b);
  const cosine = Math.cos(angle);
  if (cosine * wide <= -thin) return wide;
  return Math.sqrt(a * a + b * b + 2 * a * b * cosine) / Math.sin(angle);
}

/** What is measured where vessels meet. */
export interface JunctionTallies {
  /** Sees, per vessel and neighbour, distance of its far end from the neighbour's axis over r_a + r_b. */
  readonly separation: Tally;
  /** Sees, per pair at a node, the angle between them in rad. */
  readonly angle: Tally;
  /** Sees, per vessel, its length over the room its two ends need. */
  readonly length: Tally;
}

/** Measures the fit of the vessels that share a node. Cost: O(n), for nodes of few vessels. */
export function measureJunctions(
  forest: Forest,
  children: ChildLists,
  length: Float64Array,
  tallies: JunctionTallies,
): void {
  const { count, parent, position, radius } = forest;
  /** (n) m; ball round each node. */
  const reach = new Float64Array(count);
  /** Tubes at the node at hand, and the row of each one's other end. */
  const tube: number[] = [];
  const far: number[] = [];
  for (let node = 0; node < count; node++) {
    tube.length = 0;
    far.length = 0;
    if (parent[node]! >= 0) {
      tube.push(node);
      far.push(parent[node]!);
    }
    for (let c = children.first[node]!; c >= 0; c = children.next[c]!) {
      tube.push(c);
      far.push(c);
    }
    if (tube.length === 1) {
      reach[node] = 2 * radius[tube[0]!]!;
      continue;
    }
    for (let a = 0; a < tube.length; a++) {
      for (let b = a + 1; b < tube.length; b++) {
        const ta = tube[a]!;
        const tb = tube[b]!;
        const both = radius[ta]! + radius[tb]!;
        tallies.separation.see(nodeToSegment(position, far[a]!, node, far[b]!) / both, ta, tb);
        tallies.separation.see(nodeToSegment(position, far[b]!, node, far[a]!) / both, tb, ta);
        const angle = angleAt(position, node, far[a]!, far[b]!);
        tallies.angle.see(angle, ta, tb);
        reach[node] = Math.max(reach[node]!, junctionReach(radius[ta]!, radius[tb]!, angle));
      }
    }
  }
  for (let i = 0; i < count; i++) {
    const p = parent[i]!;
    if (p >= 0) tallies.length.see(length[i]! / (reach[p]! + reach[i]!), i);
  }
}

/** Angle at a node between the directions to two others, rad. Exact near 0 and π, where an arc cosine is not. */
function angleAt(position: Forest['position'], node: number, a: number, b: number): number {
  const ux = position[3 * a]! - position[3 * node]!;
  const uy = position[3 * a + 1]! - position[3 * node + 1]!;
  const uz = position[3 * a + 2]! - position[3 * node + 2]!;
  const vx = position[3 * b]! - position[3 * node]!;
  const vy = position[3 * b + 1]! - position[3 * node + 1]!;
  const vz = position[3 * b + 2]! - position[3 * node + 2]!;
  const nx = uy * vz - uz * vy;
  const ny = uz * vx - ux * vz;
  const nz = ux * vy - uy * vx;
  return Math.atan2(Math.sqrt(nx * nx + ny * ny + nz * nz), ux * vx + uy * vy + uz * vz);
}

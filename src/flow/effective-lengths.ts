import type { Reals } from '../core/reals.ts';
import { type Children, listChildren } from '../tree/children.ts';
import type { Forest } from '../tree/forest.ts';
import { tubeLength } from '../tree/vessels.ts';

/*
 * Lab notes. Derived here and checked against an independent solution: Stokes flow by Taylor–Hood finite elements in
 * TetGen's filling of our lumen surfaces (tests/integration/judge-flow.py). A junction of three tubes has three
 * conductances between its caps, and they are those of one star of three resistances; so each solution gives, for
 * each tube exactly, by how much it is shorter than its axis. 84 junctions were solved: side branches of 0.2 to 0.79
 * parent radii at 30° to 120°, and random ones with exponents of 2 to 3.6, turns up to 135°, also out of one plane;
 * 16 segments round, tubes as short as the mesh allows and 2.5 radii more.
 *
 * Error of the length, over that of the axis of that shortest tube (root mean square, worst):
 *
 *   axis lengths, nothing taken off                                            21 %    71 %
 *   pairs alone, weighted half cotangents, constants fitted                     4.9 %  19 %
 *   this file with its six constants fitted                                     1.5 %  10 %
 *   this file with round constants (1/2, 1, 5/4, square, 1, 1), which is kept   1.8 %   9 %
 *
 * The worst is a fork of 25° between daughters of 0.88 and 0.69.
 * On 28 random junctions that nothing was fitted to (24 segments round): 2.1 %, worst 6.7 %; axis lengths 19 %, 47 %.
 *
 * Whole trees, ten grown ones of 3 to 16 caps (tests/support/judged-trees.ts), network over Stokes flow: drops from the root to
 * every cap −2.5 to +1.6 %, with axis lengths +1.6 to +16.0 %; shares of the flow within 2 %, with axis lengths 16 %.
 */

/** Least effective length over the length of the axis. */
export const LEAST_LENGTH_SHARE = 0.1;

/**
 * How much of a tube's axis, from the node on, does not count because it lies in the lumen of one other tube there.
 *
 * Notation: a wider radius, b slimmer radius, θ angle between the axes.
 *
 * The slim tube. Where θ < 90°, its axis leaves the wide tube at a/sin θ from the node. Its mouth is as wide as itself and
 * costs something before (θ near 90°), or is drawn out to an ellipse and lets blood in earlier (θ small): less
 * b (1/2 − 5/4 (1/sin θ − 1)). Where θ ≥ 90°, the wide tube ends at the node in a half ball, which the axis leaves
 * at a; less b (1 − cos θ)/2, so that equal tubes in one line lose nothing.
 *
 * The wide tube. Where θ < 90°, both are one lumen up to a cot θ, where the slim axis leaves: that much of the wide axis
 * does not count either. What a tube as slim as it is wide would lose beyond that, it loses in proportion to (b/a)².
 *
 * @param own, other m, > 0, radii
 * @param cosine     of θ, both axes leaving the node
 * @returns          m, ≥ 0
 * Source: derived here; the entrance of a thin tube costs about half a radius as in flow through an orifice and a tube
 *         (Sampson 1891; Dagan, Weinbaum and Pfeffer 1982; from memory: 3π/16 radii a sharp edge).
 */
export function immersedLength(own: number, other: number, cosine: number): number {
  const wide = Math.max(own, other);
  const slim = Math.min(own, other);
  const square = (slim / wide) * (slim / wide);
  if (cosine <= 0) return own <= other ? wide - 0.5 * (1 - cosine) * slim : 0.5 * (1 + cosine) * wide * square;
  // Parallel tubes never part; meshes and growth refuse what comes near to it.
  const sine = Math.sqrt(Math.max(1e-6, 1 - cosine * cosine));
  const mouth = 0.5 - 1.25 * (1 / sine - 1);
  if (own <= other) return Math.max(0, wide / sine - mouth * slim);
  const shared = (wide * cosine) / sine;
  return shared + Math.max(0, wide / sine - mouth * wide - shared) * square;
}

/**
 * Length that each tube of a node loses there: the most that any one other tube takes (`immersedLength`), less a stem.
 *
 * The stem: where two tubes j and k leave at an acute angle, they are one lumen for x = max(r) cot θ, as conductive as both
 * side by side, r⁴ = rⱼ⁴ + rₖ⁴. It lies in the way of all that comes through the other tubes. With three tubes it
 * is put in line with the third, whose loss falls by x r⁴/(rⱼ⁴ + rₖ⁴) and may be negative: that tube becomes longer.
 * With more, no star holds it; it is then put in line with j and k, whose flows are taken to go with r³ (the cube law).
 *
 * @param axis   (3k) unit vectors that leave the node
 * @param radius (k) m
 * @param count  k, ≥ 1
 * @param out    (k) m; receives the losses
 * Holds for: k = 2 and 3 (bends within 0.12 radii up to 130°); with k = 4, drops over ten random junctions of tubes as
 *            short as can be were −2 to 20 % too high, 8 to 45 % with axis lengths.
 * Cost: O(k²), allocates nothing.
 */
export function junctionLosses(axis: ArrayLike<number>, radius: ArrayLike<number>, count: number, out: Float64Array) {
  const cosine = (i: number, j: number): number =>
    axis[3 * i]! * axis[3 * j]! + axis[3 * i + 1]! * axis[3 * j + 1]! + axis[3 * i + 2]! * axis[3 * j + 2]!;
  const fourth = (i: number): number => radius[i]! * radius[i]! * radius[i]! * radius[i]!;
  for (let i = 0; i < count; i++) {
    out[i] = 0;
    for (let j = 0; j < count; j++) {
      if (j !== i) out[i] = Math.max(out[i]!, immersedLength(radius[i]!, radius[j]!, cosine(i, j)));
    }
  }
  if (count < 3) return;
  for (let i = 0; i < count; i++) {
    let stem = 0;
    for (let j = 0; j < count; j++) {
      for (let k = 0; k < j; k++) {
        const c = cosine(j, k);
        const inPair = i === j || i === k;
        if (c <= 0 || inPair === (count === 3)) continue;
        const length = (Math.max(radius[j]!, radius[k]!) * c) / Math.sqrt(Math.max(1e-6, 1 - c * c));
        const partner = radius[i === j ? k : j]! / radius[i]!;
        const flow = inPair ? 1 + partner * partner * partner : 1;
        stem = Math.max(stem, (length * flow * fourth(i)) / (fourth(j) + fourth(k)));
      }
    }
    out[i]! -= stem;
  }
}

/**
 * Lengths that make the one-dimensional network agree with flow in the lumen that is meshed: the length of each axis,
 * less what it loses at its two ends where it lies in the lumen of the other tubes there, and never less than
 * `LEAST_LENGTH_SHARE` of it. They replace the lengths in the law of Hagen–Poiseuille; transit and volume keep the axis.
 *
 * @returns (n) m, > 0; 0 at roots
 * Holds for: Stokes flow (Reynolds numbers up to about 10), fillets of 0.3 radii, angles of 25° and more. Losses are those
 *            of junctions apart from each other: two that almost touch share flow that is not developed between them.
 * Cost: O(n), constant memory a node beside the result.
 */
export function effectiveLengths(forest: Forest): Float64Array {
  const n = forest.count;
  const length = new Float64Array(n);
  for (let i = 0; i < n; i++) length[i] = tubeLength(forest, i);
  const children = listChildren(forest);
  const lost = new Float64Array(n);
  let most = 2;
  for (let i = 0; i < n; i++) most = Math.max(most, children.start[i + 1]! - children.start[i]! + 1);
  const axis = new Float64Array(3 * most);
  const radius = new Float64Array(most);
  const out = new Float64Array(most);
  for (let row = 0; row < n; row++) {
    const count = loadNode(forest, children, length, row, axis, radius);
    if (count < 2) continue;
    junctionLosses(axis, radius, count, out);
    lost[row]! += out[0]!;
    for (let k = 1; k < count; k++) lost[children.list[children.start[row]! + k - 1]!]! += out[k]!;
  }
  for (let i = 0; i < n; i++) length[i] = Math.max(LEAST_LENGTH_SHARE * length[i]!, length[i]! - lost[i]!);
  return length;
}

/** Lists axes and radii of a node's tubes, its own first, then its children's; 0 at a root or terminal. */
function loadNode(
  forest: Forest,
  children: Children,
  length: Reals,
  row: number,
  axis: Float64Array,
  radius: Float64Array,
): number {
  const start = children.start[row]!;
  const end = children.start[row + 1]!;
  if (forest.parent[row]! < 0 || start === end) return 0;
  const { position } = forest;
  for (let k = 0; k <= end - start; k++) {
    const tube = k === 0 ? row : children.list[start + k - 1]!;
    const far = k === 0 ? forest.parent[row]! : tube;
    radius[k] = forest.radius[tube]!;
    for (let x = 0; x < 3; x++) axis[3 * k + x] = (position[3 * far + x]! - position[3 * row + x]!) / length[tube]!;
  }
  return end - start + 1;
}

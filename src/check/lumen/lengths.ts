import type { Tally } from '../result.ts';
import type { NetworkTable } from './network.ts';

/**
 * Effective lengths of a network, worked out again from places and radii alone: each segment's length less what it loses at
 * either end, a tenth of it at least. The rule is that of DEVELOPERS.md under Effective lengths, written here in angles.
 *
 * @returns (n) m
 * Cost: O(n)
 */
export function shortenSegments(network: NetworkTable): Float64Array {
  const at = new Map<string, End[]>();
  const length = new Float64Array(network.count);
  for (let k = 0; k < network.count; k++) {
    const way = [0, 1, 2].map((x) => network.end[6 * k + 3 + x]! - network.end[6 * k + x]!);
    const size = Math.hypot(...way);
    length[k] = size;
    const radius = network.radius[k]!;
    for (const [node, sign] of [
      [network.from[k]!, 1],
      [network.to[k]!, -1],
    ] as const) {
      const end = { segment: k, radius, way: way.map((x) => (sign * x) / size) };
      const here = at.get(node);
      if (here === undefined) at.set(node, [end]);
      else here.push(end);
    }
  }
  const lost = new Float64Array(network.count);
  for (const ends of at.values()) {
    for (const end of ends) lost[end.segment]! += lossAt(end, ends);
  }
  return length.map((size, k) => Math.max(size / 10, size - lost[k]!));
}

/** An end of a segment: the unit vector points away from the node. */
interface End {
  readonly segment: number;
  readonly radius: number;
  readonly way: readonly number[];
}

/** Lengths shared with a tube that is almost parallel end somewhere: sines count as this at least. */
const LEAST_SINE = 1e-3;

function lossAt(end: End, ends: readonly End[]): number {
  let most = 0;
  for (const other of ends) if (other !== end) most = Math.max(most, lossBeside(end, other));
  return most - stemOf(end, ends);
}

/** Angle between two ends in rad, and its sine. */
function angleOf(a: End, b: End): { angle: number; sine: number } {
  const [ax, ay, az] = a.way as [number, number, number];
  const [bx, by, bz] = b.way as [number, number, number];
  const across = Math.hypot(ay * bz - az * by, az * bx - ax * bz, ax * by - ay * bx);
  return { angle: Math.atan2(across, ax * bx + ay * by + az * bz), sine: Math.max(LEAST_SINE, across) };
}

/** What the axis of `end` loses in the lumen of one other tube. */
function lossBeside(end: End, other: End): number {
  const { angle, sine } = angleOf(end, other);
  const a = Math.max(end.radius, other.radius);
  const b = Math.min(end.radius, other.radius);
  const slim = end.radius <= other.radius;
  if (angle >= Math.PI / 2) {
    const turned = Math.sin(angle / 2);
    if (slim) return a - b * turned * turned;
    return (b * b * (1 - turned * turned)) / a;
  }
  const leaves = a / sine;
  const mouth = 1.75 - 1.25 / sine;
  if (slim) return Math.max(0, leaves - b * mouth);
  const shared = leaves * Math.cos(angle);
  return shared + (Math.max(0, leaves - a * mouth - shared) * b * b) / (a * a);
}

/** How much of the stem that two tubes share near the node lies in the way of `end`. */
function stemOf(end: End, ends: readonly End[]): number {
  if (ends.length < 3) return 0;
  const fourth = ({ radius }: End) => radius * radius * radius * radius;
  let most = 0;
  for (const [j, one] of ends.entries()) {
    for (const two of ends.slice(j + 1)) {
      const member = end === one || end === two;
      if (member !== ends.length > 3) continue;
      const { angle, sine } = angleOf(one, two);
      if (angle >= Math.PI / 2) continue;
      let stem =
        (Math.max(one.radius, two.radius) * Math.cos(angle) * fourth(end)) / (sine * (fourth(one) + fourth(two)));
      if (member) {
        const ratio = (end === one ? two : one).radius / end.radius;
        stem *= 1 + ratio * ratio * ratio;
      }
      most = Math.max(most, stem);
    }
  }
  return most;
}

/**
 * Holds both columns of lengths to those worked out again.
 *
 * @param tally sees the greatest difference over the length, a segment
 */
export function lookAtLengths(network: NetworkTable, shortened: Float64Array, tally: Tally): void {
  for (let k = 0; k < network.count; k++) {
    const size = Math.hypot(...[0, 1, 2].map((x) => network.end[6 * k + 3 + x]! - network.end[6 * k + x]!));
    let off = Math.abs(network.length[k]! - size);
    if (network.effectiveLength !== null) off = Math.max(off, Math.abs(network.effectiveLength[k]! - shortened[k]!));
    tally.see(off / size, k);
  }
}

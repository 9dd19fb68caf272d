import { inputError } from '../core/errors.ts';
import type { Children } from '../tree/children.ts';
import type { Forest } from '../tree/forest.ts';
import { tubeLength, vesselOfRow } from '../tree/vessels.ts';

import type { JunctionShape } from './junction-shape.ts';
import type { LumenProblem } from './lumen.ts';

/** Where the plain tube of every vessel begins and ends, and the frame its rings are drawn in. */
export interface TubeLayout {
  /** (n) m from the root-side node to the first ring. */
  readonly first: Float64Array;
  /** (n) m from the root-side node to the last ring. */
  readonly last: Float64Array;
  /** (n) strips of triangles between first and last ring; 0 where two junction patches share a ring. */
  readonly strips: Int32Array;
  /** (n) m */
  readonly length: Float64Array;
  /** (3n) unit vector from the root-side node to the far node. */
  readonly axis: Float64Array;
  /** (3n) unit vector square to the axis; corner 0 of an even ring lies this way. */
  readonly side: Float64Array;
  /** (n) m, radius of the rings' corners: their polygons have the area of the vessel's circle. */
  readonly corner: Float64Array;
  /** (n) 1 at nodes one of whose vessels is too short for its junctions. */
  readonly tight: Uint8Array;
  /** Edge length wanted in junction patches over the corner radius of the tube it lies on. */
  readonly edge: number;
}

/** Radius of a regular polygon's corners over the radius of the circle of the same area. */
export function cornerRatio(around: number): number {
  const angle = (2 * Math.PI) / around;
  return Math.sqrt(angle / Math.sin(angle));
}

/**
 * Puts the tubes of a node into a shape, in units of the widest corner radius: the tube of the node itself first
 * (unless it is a root), then its children's.
 *
 * @returns m, the unit
 */
export function loadShape(
  shape: JunctionShape,
  forest: Forest,
  children: Children,
  row: number,
  layout: Pick<TubeLayout, 'axis' | 'corner' | 'edge'>,
): number {
  const start = children.start[row]!;
  const end = children.start[row + 1]!;
  const { axis, corner, edge } = layout;
  shape.reset(end - start + 1);
  let unit = corner[row]!;
  for (let i = start; i < end; i++) unit = Math.max(unit, corner[children.list[i]!]!);
  if (forest.parent[row]! >= 0) {
    const a = corner[row]! / unit;
    shape.addTube(-axis[3 * row]!, -axis[3 * row + 1]!, -axis[3 * row + 2]!, a, edge * a);
  }
  for (let i = start; i < end; i++) {
    const child = children.list[i]!;
    const a = corner[child]! / unit;
    shape.addTube(axis[3 * child]!, axis[3 * child + 1]!, axis[3 * child + 2]!, a, edge * a);
  }
  return unit;
}

/**
 * Decides for every vessel how much of it is plain tube. What lies nearer to a junction belongs to that junction's
 * patch; the patch takes what it needs, and a little more where there is room.
 *
 * @param spacing axial distance of rings over the corner radius
 * @throws InputError for a vessel of no length
 */
export function layOutTubes(
  forest: Forest,
  children: Children,
  shape: JunctionShape,
  around: number,
  spacing: number,
  problems: Omit<LumenProblem, 'vessel'>[],
): TubeLayout {
  const n = forest.count;
  const chord = 2 * Math.sin(Math.PI / around);
  const ratio = cornerRatio(around);
  // From 24 segments up no edge may be longer than 0.3 radii; patches reach 1.3 times what they are asked for.
  const edge = around >= 24 ? Math.min(chord, 0.228) : chord;
  const length = new Float64Array(n);
  const axis = new Float64Array(3 * n);
  const side = new Float64Array(3 * n);
  const corner = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    length[i] = tubeLength(forest, i);
    if (forest.parent[i]! >= 0 && !(length[i]! > 0))
      throw inputError(
        'no-length',
        `vessel ${vesselOfRow(forest, i)}`,
        'got a vessel of no length, expected two places apart',
      );
    corner[i] = ratio * forest.radius[i]!;
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    for (let k = 0; k < 3; k++)
      axis[3 * i + k] = (forest.position[3 * i + k]! - forest.position[3 * parent + k]!) / length[i]!;
    layFrame(axis, side, i);
  }
  // Distances of the rim from the node that are needed, that leave a row of triangles, and that let edges grow up to
  // this tube's: at the root-side end and at the far end of each vessel.
  const need = [new Float64Array(n), new Float64Array(n)] as const;
  const nice = [new Float64Array(n), new Float64Array(n)] as const;
  const want = [new Float64Array(n), new Float64Array(n)] as const;
  for (let row = 0; row < n; row++) {
    if (forest.parent[row]! < 0 || children.start[row] === children.start[row + 1]) continue;
    const unit = loadShape(shape, forest, children, row, { axis, corner, edge });
    for (let tube = 0; tube < shape.count; tube++) {
      const vessel = tube === 0 ? row : children.list[children.start[row]! + tube - 1]!;
      const end = tube === 0 ? 1 : 0;
      // Parallel tubes are never clear of each other: more than any length.
      const most = (2 * length[vessel]!) / unit;
      const clear = Math.min(most, shape.clearAlong(tube, false));
      const strip = 0.6 * shape.edge[tube]!;
      need[end][vessel] = unit * clear;
      nice[end][vessel] = unit * (clear + strip);
      want[end][vessel] = unit * (Math.min(most, shape.clearAlong(tube, true)) + strip);
    }
  }
  const first = new Float64Array(n);
  const last = new Float64Array(n);
  const strips = new Int32Array(n);
  const tight = new Uint8Array(n);
  for (let i = 0; i < n; i++) {
    if (forest.parent[i]! < 0) continue;
    const chordHere = chord * corner[i]!;
    const total = length[i]!;
    const least = need[0][i]! + need[1][i]!;
    const [from, to] = nice[0][i]! + nice[1][i]! < total ? [nice, want] : [need, nice];
    const lower = from[0][i]! + from[1][i]!;
    const upper = to[0][i]! + to[1][i]!;
    let near = to[0][i]!;
    let far = to[1][i]!;
    if (upper > total) {
      const share = lower < total ? (total - lower) / (upper - lower) : 0;
      near = from[0][i]! + share * (near - from[0][i]!);
      far = from[1][i]! + share * (far - from[1][i]!);
      if (!(least < total)) {
        near = total * (need[1][i]! > 0 ? need[0][i]! / least : 0.9);
        far = need[0][i]! > 0 ? total - near : 0.9 * total;
        if (need[1][i] === 0) far = 0;
        if (need[0][i] === 0) near = 0;
        tight[i] = 1;
        tight[forest.parent[i]!] = 1;
        problems.push({
          row: i,
          why: `length ${total} m, but the junctions at its ends need ${least} m: they run into each other`,
        });
      }
    }
    const rootEnd = forest.parent[forest.parent[i]!]! < 0;
    const openEnd = children.start[i] === children.start[i + 1];
    // A cap needs a strip of its own, not too low.
    if (openEnd && least < total) near = Math.max(need[0][i]!, Math.min(near, total - 0.7 * chordHere));
    if (rootEnd && least < total) far = Math.max(need[1][i]!, Math.min(far, total - near - 0.7 * chordHere));
    const rest = total - near - far;
    let count = Math.ceil(rest / (spacing * corner[i]!) - 1e-9);
    // A strip lower than half an edge would have flat triangles: the two patches then share a ring.
    if (rest < 0.5 * chordHere) count = rootEnd || openEnd ? 1 : 0;
    if (count === 0) {
      near += 0.5 * rest;
      far = total - near;
    }
    first[i] = near;
    last[i] = total - far;
    strips[i] = count;
    if (
      (rootEnd || openEnd) &&
      least < total &&
      total - need[0][i]! - need[1][i]! < 2 * forest.radius[i]! * (1 - 1e-9)
    ) {
      problems.push({
        row: i,
        why: `straight run before its cap is ${total - need[0][i]! - need[1][i]!} m, wanted two radii, ${2 * forest.radius[i]!} m`,
      });
    }
  }
  return { first, last, strips, tight, length, axis, side, corner, edge };
}

/** Sets a unit vector square to an axis: the coordinate direction that leans on it least, straightened. */
function layFrame(axis: Float64Array, side: Float64Array, row: number): void {
  const x = axis[3 * row]!;
  const y = axis[3 * row + 1]!;
  const z = axis[3 * row + 2]!;
  const ax = Math.abs(x);
  const ay = Math.abs(y);
  const az = Math.abs(z);
  const k = ax <= ay && ax <= az ? 0 : ay <= az ? 1 : 2;
  const lean = axis[3 * row + k]!;
  const scale = 1 / Math.sqrt(1 - lean * lean);
  side[3 * row] = ((k === 0 ? 1 : 0) - lean * x) * scale;
  side[3 * row + 1] = ((k === 1 ? 1 : 0) - lean * y) * scale;
  side[3 * row + 2] = ((k === 2 ? 1 : 0) - lean * z) * scale;
}

import type { Tally } from '../result.ts';
import type { NetworkTable } from './network.ts';
import { JoinedSets } from './topology.ts';
import type { VolumeCells } from './volume-file.ts';

/** Sections looked at in each tree. */
const SECTIONS = 10;

/**
 * Cuts a cell in tetrahedra from its least corner, and quadrilaterals across from it from theirs, so that neighbours cut
 * their common faces alike; hands on the four corners of each.
 */
function cutCell(volume: VolumeCells, cell: number, take: (a: number, b: number, c: number, d: number) => void): void {
  const { corner, start, kind } = volume;
  const from = start[cell]!;
  const { size, faces } = kind[cell]!;
  let least = 0;
  for (let k = 1; k < size; k++) if (corner[from + k]! < corner[from + least]!) least = k;
  const apex = corner[from + least]!;
  for (const face of faces) {
    if (face.includes(least)) continue;
    let first = 0;
    for (let k = 1; k < face.length; k++) if (corner[from + face[k]!]! < corner[from + face[first]!]!) first = k;
    const at = (k: number): number => corner[from + face[(first + k) % face.length]!]!;
    for (let k = 1; k + 1 < face.length; k++) take(at(0), at(k), at(k + 1), apex);
  }
}

/** A plane across a vessel. */
interface Section {
  /** m */
  readonly place: readonly [number, number, number];
  /** Unit length. */
  readonly normal: readonly [number, number, number];
  /** m from the place beyond which cells are not looked at. */
  readonly reach: number;
  /** Cells of this vessel alone. */
  readonly vessel: number;
}

/**
 * Flux through a section, the velocity taken linear over tetrahedra.
 *
 * @param unit m, one unit of length of the file
 * @returns    m³/s along the normal
 */
function fluxThrough(volume: VolumeCells, unit: number, { place, normal, reach, vessel }: Section): number {
  const { position, velocity, corner, start } = volume;
  const [nx, ny, nz] = normal;
  const away = (v: number, k: number): number => unit * position[3 * v + k]! - place[k]!;
  const height = (v: number): number => away(v, 0) * nx + away(v, 1) * ny + away(v, 2) * nz;
  const speed = (v: number): number => velocity[3 * v]! * nx + velocity[3 * v + 1]! * ny + velocity[3 * v + 2]! * nz;
  let flux = 0;
  // Where edges cross the plane: place and speed.
  const rim = new Float64Array(16);
  let crossings = 0;
  const cross = (v: number, w: number): void => {
    const t = height(v) / (height(v) - height(w));
    for (let k = 0; k < 3; k++) rim[4 * crossings + k] = away(v, k) + t * (away(w, k) - away(v, k));
    rim[4 * crossings++ + 3] = speed(v) + t * (speed(w) - speed(v));
  };
  const through = (): number => {
    let sum = 0;
    for (let i = 1; i + 1 < crossings; i++) {
      const [b, c] = [4 * i, 4 * i + 4];
      const [ux, uy, uz] = [rim[b]! - rim[0]!, rim[b + 1]! - rim[1]!, rim[b + 2]! - rim[2]!];
      const [vx, vy, vz] = [rim[c]! - rim[0]!, rim[c + 1]! - rim[1]!, rim[c + 2]! - rim[2]!];
      const twice = Math.hypot(uy * vz - uz * vy, uz * vx - ux * vz, ux * vy - uy * vx);
      sum += (twice * (rim[3]! + rim[b + 3]! + rim[c + 3]!)) / 6;
    }
    return sum;
  };
  for (let c = 0; c < volume.cells; c++) {
    if (volume.vessel[c] !== vessel) continue;
    const v = corner[start[c]!]!;
    if (Math.hypot(away(v, 0), away(v, 1), away(v, 2)) > reach) continue;
    cutCell(volume, c, (p, q, r, s) => {
      const above: number[] = [];
      const below: number[] = [];
      for (const w of [p, q, r, s]) (height(w) > 0 ? above : below).push(w);
      crossings = 0;
      if (above.length === 2) {
        cross(above[0]!, below[0]!);
        cross(above[0]!, below[1]!);
        cross(above[1]!, below[1]!);
        cross(above[1]!, below[0]!);
      } else if (above.length > 0) for (const w of above) for (const x of below) cross(w, x);
      flux += through();
    });
  }
  return flux;
}

/** Sees the flux halfway along the longest segments, in radii, of each tree. */
export function lookAtSections(volume: VolumeCells, unit: number, network: NetworkTable, tally: Tally): void {
  const trees = treesOf(network);
  const slender = (k: number): number => network.length[k]! / network.radius[k]!;
  for (const tree of trees) {
    for (const k of tree.sort((a, b) => slender(b) - slender(a) || a - b).slice(0, SECTIONS)) {
      const from = [0, 1, 2].map((m) => network.end[6 * k + m]!);
      const way = [0, 1, 2].map((m) => network.end[6 * k + 3 + m]! - from[m]!);
      const length = Math.hypot(...way);
      const flux = fluxThrough(volume, unit, {
        place: from.map((x, m) => x + 0.5 * way[m]!) as [number, number, number],
        normal: way.map((x) => x / length) as [number, number, number],
        reach: 2 * network.radius[k]!,
        vessel: Number(network.name[k]),
      });
      tally.see(Math.abs(flux / network.flow[k]! - 1), k);
    }
  }
}

/** Segments that hang together. */
function treesOf({ count, from, to }: NetworkTable): number[][] {
  const nodes = new Map<string, number>();
  for (const name of [...from, ...to]) if (!nodes.has(name)) nodes.set(name, nodes.size);
  const sets = new JoinedSets(nodes.size);
  for (let k = 0; k < count; k++) sets.join(nodes.get(from[k]!)!, nodes.get(to[k]!)!);
  const trees = new Map<number, number[]>();
  for (let k = 0; k < count; k++) {
    const tree = sets.find(nodes.get(from[k]!)!);
    const list = trees.get(tree);
    if (list === undefined) trees.set(tree, [k]);
    else list.push(k);
  }
  return [...trees.values()];
}

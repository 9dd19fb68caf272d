import type { Tally } from '../result.ts';
import type { BoundaryTable } from './boundary.ts';
import type { NetworkTable } from './network.ts';
import type { Solids } from './solids.ts';
import { Reference } from './twins.ts';
import type { OuterFaces } from './volume-faces.ts';
import type { VolumeCells } from './volume-file.ts';
import { weldCorners } from './weld.ts';

/** What a volume mesh is held against. */
export interface VolumeContext {
  /** m, one unit of length of the file; its name. */
  readonly unit: number;
  readonly unitName: string;
  /** Of `lumen.stl`, m. */
  readonly solids: Solids;
  /** m³ and m² of that surface. */
  readonly volume: number;
  readonly area: number;
  /** m, precision that `lumen.stl` is printed with. */
  readonly slack: number;
  /** Segments round a vessel. */
  readonly around: number;
  readonly boundary: BoundaryTable;
  readonly network: NetworkTable | null;
}

/** Row of the cap that each outer face lies in, −1 for the wall; compares both with the surface. */
export function lookAtBoundary(
  volume: VolumeCells,
  outer: OuterFaces,
  context: VolumeContext,
  tally: Tally,
): Int32Array {
  const { boundary, solids, unit } = context;
  const capOf = new Int32Array(outer.count).fill(-1);
  const capAt = capsAtPoints(volume, outer, context);
  const area = new Float64Array(boundary.count);
  const wall: number[] = [];
  for (let f = 0; f < outer.count; f++) {
    const corners = cornersOf(outer, f);
    const row = capAt(corners[0]!, corners);
    capOf[f] = row;
    if (row >= 0) {
      const normal = [0, 1, 2].map((k) => boundary.normal[3 * row + k]!);
      const across = vectorArea(volume.position, corners);
      area[row]! += unit * unit * across.reduce((sum, x, k) => sum + x * normal[k]!, 0);
      continue;
    }
    if (corners.length === 4) {
      tally.fail(
        `lumen_volume.vtu:${outer.cell[f]}`,
        outer.cell[f]!,
        1,
        0,
        'a quadrilateral of the cell is on the wall',
      );
      continue;
    }
    for (const v of corners) for (let k = 0; k < 3; k++) wall.push(unit * volume.position[3 * v + k]!);
  }
  const ofSurface = new Float64Array(boundary.count);
  const wanted: number[] = [];
  const rows = solids.names.map((name) => boundary.name.indexOf(name));
  for (let f = 0; f < solids.solid.length; f++) {
    const row = rows[solids.solid[f]!]!;
    const places = solids.corner.subarray(9 * f, 9 * f + 9);
    if (row < 0) wanted.push(...places);
    else {
      const across = vectorArea(Float64Array.from(places), [0, 1, 2]);
      for (let k = 0; k < 3; k++) ofSurface[row]! += across[k]! * boundary.normal[3 * row + k]!;
    }
  }
  for (let row = 0; row < boundary.count; row++) {
    const off = Math.abs(area[row]! / ofSurface[row]! - 1);
    const rounded = (20 * context.slack) / boundary.radius[row]!;
    tally.checked++;
    if (!(off <= Math.max(1e-9, rounded)))
      tally.fail(
        boundary.name[row]!,
        row,
        off,
        0,
        `the faces at the cap fill ${area[row]} m², the cap has ${ofSurface[row]} m²`,
      );
  }
  const surface = wallSolids(wanted);
  const reference = new Reference(weldCorners(surface), surface, context.slack);
  reference.compare('lumen_volume.vtu', wallSolids(wall), false, tally);
  return capOf;
}

function wallSolids(corner: readonly number[]): Solids {
  return { corner: Float64Array.from(corner), solid: new Int32Array(corner.length / 9), names: ['wall'] };
}

/** Tells the cap that all corners of a face lie in, or −1. */
function capsAtPoints(
  volume: VolumeCells,
  outer: OuterFaces,
  { boundary, unit, slack }: VolumeContext,
): (first: number, corners: readonly number[]) => number {
  // Few points lie near a cap; which, is asked once.
  const near = new Map<number, number[]>();
  const { position } = volume;
  const inCap = (v: number, row: number): boolean => {
    let square = 0;
    let height = 0;
    for (let k = 0; k < 3; k++) {
      const x = unit * position[3 * v + k]! - boundary.centre[3 * row + k]!;
      square += x * x;
      height += x * boundary.normal[3 * row + k]!;
    }
    const r = boundary.radius[row]!;
    return Math.abs(height) <= 1e-4 * r + slack && square <= 1.25 * r * r;
  };
  const points = new Set(outer.corner);
  for (let row = 0; row < boundary.count; row++) {
    for (const v of points) {
      if (v < 0 || !inCap(v, row)) continue;
      near.set(v, [...(near.get(v) ?? []), row]);
    }
  }
  return (first, corners) =>
    near.get(first)?.find((row) => corners.every((v) => near.get(v)?.includes(row) === true)) ?? -1;
}

/** Corners of an outer face. */
export function cornersOf({ corner }: OuterFaces, f: number): number[] {
  const corners = [corner[4 * f]!, corner[4 * f + 1]!, corner[4 * f + 2]!];
  if (corner[4 * f + 3]! >= 0) corners.push(corner[4 * f + 3]!);
  return corners;
}

/** Area of a face as a vector square to it. */
function vectorArea(position: Float64Array, corners: readonly number[]): [number, number, number] {
  const out: [number, number, number] = [0, 0, 0];
  const o = 3 * corners[0]!;
  for (let i = 1; i + 1 < corners.length; i++) {
    const [a, b] = [3 * corners[i]!, 3 * corners[i + 1]!];
    for (let k = 0; k < 3; k++) {
      const [m, n] = [(k + 1) % 3, (k + 2) % 3];
      out[k]! +=
        0.5 *
        ((position[a + m]! - position[o + m]!) * (position[b + n]! - position[o + n]!) -
          (position[a + n]! - position[o + n]!) * (position[b + m]! - position[o + m]!));
    }
  }
  return out;
}

/** Sees how far the flux through each cap is off. */
export function lookAtCaps(
  volume: VolumeCells,
  outer: OuterFaces,
  capOf: Int32Array,
  { boundary, unit }: VolumeContext,
  tally: Tally,
): void {
  const flux = new Float64Array(boundary.count);
  for (let f = 0; f < outer.count; f++) {
    const row = capOf[f]!;
    if (row < 0) continue;
    const corners = cornersOf(outer, f);
    // Quadrilaterals as the mean of their two cuts.
    const cuts: number[][] =
      corners.length === 3
        ? [corners]
        : [
            [0, 1, 2],
            [0, 2, 3],
            [0, 1, 3],
            [1, 2, 3],
          ].map((cut) => cut.map((k) => corners[k]!));
    for (const cut of cuts) {
      const across = vectorArea(volume.position, cut);
      const share = (unit * unit) / (corners.length === 3 ? 3 : 6);
      for (const v of cut) for (let k = 0; k < 3; k++) flux[row]! += share * across[k]! * volume.velocity[3 * v + k]!;
    }
  }
  for (let row = 0; row < boundary.count; row++) {
    const wanted = (boundary.type[row] === 'inlet' ? -1 : 1) * boundary.flow[row]!;
    tally.see(Math.abs(flux[row]! / wanted - 1), row);
  }
}

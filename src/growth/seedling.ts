import { inputError } from '../core/errors.ts';
import { FIT_MARGIN, RUN_OUT } from '../room/reach.ts';
import type { Room } from '../room/room.ts';
import type { TreeSpec } from '../spec/types.ts';
import { depthGradient } from '../tissue/depth-gradient.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import { routeInside } from './route.ts';

/** A root and, where the inlet asks for one, the stub that leads in. */
export interface Seedling {
  readonly root: number;
  /** Row of the stub's far end, or −1 where the first vessel may leave the root in any direction. */
  readonly stub: number;
}

/** How far outside the tissue an inlet may sit, as a share of the tissue's longest edge. */
const OUTSIDE = 0.1;
/** Radii that a stub may be longer than that, to come in at a slant. */
const SLANT = 20;

/**
 * Plants a tree: its root at the inlet and, where a direction is given or the inlet is not deep enough for the first
 * vessel, a straight stub until the vessel lies in the tissue and has its run-out. The stub of an inlet at or outside
 * the boundary is exempt from containment.
 *
 * @throws InputError where the inlet is too far outside, or the way in finds no depth for the first vessel
 */
export function plant(
  builder: ForestBuilder,
  room: Room,
  tree: TreeSpec,
  where: string,
  inletRadius: number,
): Seedling {
  const { tissue } = room;
  const [x, y, z] = tree.inlet.position;
  const depth = tissue.depth(x, y, z);
  if (!(depth >= -OUTSIDE * room.span)) {
    throw inputError(
      'inlet-outside',
      `${where}.inlet.position`,
      `got a point ${micrometres(-depth)} outside the tissue, expected it in the tissue, on its boundary or at most ${micrometres(OUTSIDE * room.span)} outside`,
    );
  }
  const index = builder.addRoot(x, y, z, inletRadius);
  const root = builder.roots[index]!;
  const deep = depth >= 1.05 * inletRadius;
  if (deep && tree.inlet.direction === null) return { root, stub: -1 };
  const direction = tree.inlet.direction ?? inward(tissue, x, y, z);
  const runOut = 1.02 * FIT_MARGIN * (RUN_OUT + Math.SQRT2) * inletRadius;
  const wanted = 1.06 * inletRadius;
  let at = 0;
  let inside = false;
  let reached = false;
  while (at <= OUTSIDE * room.span + SLANT * inletRadius) {
    const here = tissue.depth(x + at * direction[0], y + at * direction[1], z + at * direction[2]);
    if (here >= wanted && at >= runOut) {
      const stub = builder.addChild(root, x + at * direction[0], y + at * direction[1], z + at * direction[2]);
      room.pinned.add(stub);
      if (!deep) room.exempt.add(stub);
      return { root, stub };
    }
    // Once in, a stub stays in: it is no way through empty space, and only its way in is exempt.
    if ((inside && here < 0) || (reached && here < wanted)) break;
    inside ||= here > 0;
    reached ||= here >= wanted;
    // Small steps, so that a thin part that is crossed is not stepped over.
    at += 0.04 * inletRadius;
  }
  throw inputError(
    'tissue-too-small',
    `${where}.inlet`,
    `got a first vessel of radius ${micrometres(inletRadius)} that finds no depth of ${micrometres(wanted)} along its direction, expected tissue deep enough for it (less flow, a higher pressure drop, or another place)`,
  );
}

/** Hangs the first terminal on a bare tree, past bends where the tissue asks for them. Gives its row, or −1. */
export function hangFirst(
  builder: ForestBuilder,
  room: Room,
  seedling: Seedling,
  x: number,
  y: number,
  z: number,
  share: number,
): number {
  const start = seedling.stub < 0 ? seedling.root : seedling.stub;
  const p = builder.position;
  const radius = builder.inletRadius[builder.tree[start]!]!;
  const from = [p[3 * start]!, p[3 * start + 1]!, p[3 * start + 2]!] as const;
  const bends = routeInside(room.tissue, from, [x, y, z], 1.02 * radius);
  if (bends === null) return -1;
  const rows: number[] = seedling.stub < 0 ? [] : [seedling.stub];
  let above = start;
  for (let k = 0; k < bends.length; k += 3) {
    above = builder.addChild(above, bends[k]!, bends[k + 1]!, bends[k + 2]!);
    rows.push(above);
  }
  const site = builder.addChild(above, x, y, z);
  rows.push(site);
  for (const row of rows) {
    builder.load[row] = share;
    builder.weight[row] = share;
  }
  room.begin();
  for (const row of rows) room.move(row);
  if (rows.every((row) => room.fits(row)) && rows.every((row) => room.certify(row, 1.02))) {
    room.commit();
    return site;
  }
  for (let k = rows.length - 1; k >= (seedling.stub < 0 ? 0 : 1); k--) builder.removeTerminal(rows[k]!);
  return -1;
}

function inward(tissue: Tissue, x: number, y: number, z: number): readonly [number, number, number] {
  const slope = new Float64Array(3);
  const size = depthGradient(tissue, x, y, z, slope);
  if (!(size > 0)) return [1, 0, 0];
  return [slope[0]! / size, slope[1]! / size, slope[2]! / size];
}

function micrometres(metres: number): string {
  return `${Number((metres * 1e6).toPrecision(4))} µm`;
}

import { inputError } from '../core/errors.ts';
import { type Children, listChildren } from '../tree/children.ts';
import type { Forest, TreeKind } from '../tree/forest.ts';
import { vesselOfRow } from '../tree/vessels.ts';
import { buildDisc, type Disc } from './disc.ts';
import { GrowingSurface } from './growing-surface.ts';
import { PatchBuilder } from './junction-patch.ts';
import { JunctionShape } from './junction-shape.ts';
import type { LumenMesh, LumenPatch, LumenProblem } from './lumen.ts';
import { layOutTubes, type TubeLayout } from './tube-layout.ts';

export interface LumenOptions {
  /** Segments round a vessel, 8 to 256; default 24. */
  readonly around?: number | undefined;
  /** Axial edges over circumferential edges in plain tubes, 1 to 3.5; default 1. */
  readonly axialStretch?: number | undefined;
  /** One a tree; `supply` where not given. Decides which caps are inlets. */
  readonly kinds?: readonly TreeKind[] | undefined;
  /** (n) number that each row's vessel is called by; the forest's own vessel numbers (tree/vessels.ts) where left out. */
  readonly vesselNumbers?: ArrayLike<number> | undefined;
}

export const LUMEN_DEFAULTS = { around: 24, axialStretch: 1 } as const;

/** Smallest angle a mesh promises, in degrees. */
export const LEAST_ANGLE = 15;

/**
 * Builds the lumen surface of a forest: plain tubes of staggered rings, a patch of triangles on the filleted union of
 * tubes at every inner node, a flat cap at every root and terminal. One closed surface a tree.
 *
 * Ring corners lie a little outside the vessel's circle, so that caps and tubes have the circle's area.
 *
 * @returns the mesh; where a vessel is too short for its junctions, or a patch missed the least angle, that is listed
 *          in `problems` and the mesh there may cross itself
 * @throws  InputError for options out of range
 * Cost:    per vessel, O(length / radius · around); per junction some milliseconds at 24 around.
 */
export function buildLumen(forest: Forest, options: LumenOptions = {}): LumenMesh {
  const around = options.around ?? LUMEN_DEFAULTS.around;
  const stretch = options.axialStretch ?? LUMEN_DEFAULTS.axialStretch;
  if (!(Number.isInteger(around) && around >= 8 && around <= 256))
    throw inputError('out-of-range', 'around', `got ${around}, expected a whole number from 8 to 256`);
  if (!(stretch >= 1 && stretch <= 3.5))
    throw inputError('out-of-range', 'axialStretch', `got ${stretch}, expected 1 to 3.5`);

  const numbers = Int32Array.from(
    options.vesselNumbers ?? Int32Array.from({ length: forest.count }, (_, row) => vesselOfRow(forest, row)),
  );
  const children = listChildren(forest);
  const shape = new JunctionShape();
  const problems: Omit<LumenProblem, 'vessel'>[] = [];
  const chord = 2 * Math.sin(Math.PI / around);
  const layout = layOutTubes(forest, children, shape, around, 0.99 * chord * stretch, problems);
  const out = new GrowingSurface(forest.count * around * 16, forest.count * around * 32);
  const rings = addTubes(out, forest, layout, numbers, around);
  const patches = addCaps(out, forest, children, layout, rings, buildDisc(around), numbers, options.kinds);
  const builder = new PatchBuilder(forest, children, layout, shape, around);
  const poor = Math.sin((LEAST_ANGLE * Math.PI) / 180);
  for (let row = 0; row < forest.count; row++) {
    if (forest.parent[row]! < 0 || children.start[row] === children.start[row + 1]) continue;
    const worst = builder.addPatch(out, rings, numbers, row);
    if (worst < poor * poor) {
      const angle = (Math.asin(Math.sqrt(Math.max(0, worst))) * 180) / Math.PI;
      problems.push({
        row,
        why:
          worst < 0
            ? 'the wall of this junction is folded'
            : `smallest angle ${angle.toFixed(1)}°, wanted ${LEAST_ANGLE}°`,
      });
    }
  }
  return {
    position: out.position.slice(0, 3 * out.vertices),
    triangle: out.triangle.slice(0, 3 * out.triangles),
    patch: out.patch.slice(0, out.triangles),
    vessel: out.vessel.slice(0, out.triangles),
    row: out.row.slice(0, out.vertices),
    along: out.along.slice(0, out.vertices),
    patches,
    problems: problems.map((problem) => ({ ...problem, vessel: numbers[problem.row]! })),
    around,
  };
}

/** Adds rings and strips of every vessel; returns (n) the first vertex of each vessel's first ring. */
function addTubes(
  out: GrowingSurface,
  forest: Forest,
  layout: TubeLayout,
  numbers: Int32Array,
  around: number,
): Int32Array {
  const rings = new Int32Array(forest.count).fill(-1);
  // Corners of an even ring at 2j half steps, of an odd ring at 2j + 1.
  const cosine = new Float64Array(2 * around);
  const sine = new Float64Array(2 * around);
  for (let j = 0; j < 2 * around; j++) {
    cosine[j] = Math.cos((Math.PI * j) / around);
    sine[j] = Math.sin((Math.PI * j) / around);
  }
  for (let i = 0; i < forest.count; i++) {
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    const ux = layout.axis[3 * i]!;
    const uy = layout.axis[3 * i + 1]!;
    const uz = layout.axis[3 * i + 2]!;
    const ex = layout.side[3 * i]!;
    const ey = layout.side[3 * i + 1]!;
    const ez = layout.side[3 * i + 2]!;
    const fx = uy * ez - uz * ey;
    const fy = uz * ex - ux * ez;
    const fz = ux * ey - uy * ex;
    const a = layout.corner[i]!;
    const strips = layout.strips[i]!;
    const start = out.vertices;
    rings[i] = start;
    const vessel = numbers[i]!;
    for (let k = 0; k <= strips; k++) {
      const t = strips === 0 ? 0 : k / strips;
      const s = layout.first[i]! + t * (layout.last[i]! - layout.first[i]!);
      const along = s / layout.length[i]!;
      const cx = forest.position[3 * parent]! + s * ux;
      const cy = forest.position[3 * parent + 1]! + s * uy;
      const cz = forest.position[3 * parent + 2]! + s * uz;
      for (let j = 0; j < around; j++) {
        const c = a * cosine[2 * j + (k & 1)]!;
        const d = a * sine[2 * j + (k & 1)]!;
        out.addVertex(cx + c * ex + d * fx, cy + c * ey + d * fy, cz + c * ez + d * fz, i, along);
      }
    }
    for (let k = 0; k < strips; k++) {
      const low = start + k * around;
      const high = low + around;
      for (let j = 0; j < around; j++) {
        const next = j + 1 === around ? 0 : j + 1;
        if ((k & 1) === 0) {
          out.addTriangle(low + j, low + next, high + j, 0, vessel);
          out.addTriangle(low + next, high + next, high + j, 0, vessel);
        } else {
          out.addTriangle(low + j, low + next, high + next, 0, vessel);
          out.addTriangle(low + j, high + next, high + j, 0, vessel);
        }
      }
    }
  }
  return rings;
}

/** Adds the caps at roots and terminals; returns the patch list, wall first. */
function addCaps(
  out: GrowingSurface,
  forest: Forest,
  children: Children,
  layout: TubeLayout,
  rings: Int32Array,
  disc: Disc,
  numbers: Int32Array,
  kinds: readonly TreeKind[] | undefined,
): LumenPatch[] {
  const { around } = disc;
  const patches: LumenPatch[] = [
    { name: 'wall', kind: 'wall', row: -1, tree: -1, vessel: -1, centre: [0, 0, 0], normal: [0, 0, 0], radius: 0 },
  ];
  for (let row = 0; row < forest.count; row++) {
    const root = forest.parent[row]! < 0;
    if (!root && children.start[row] !== children.start[row + 1]) continue;
    const vessel = root ? children.list[children.start[row]!]! : row;
    const sign = root ? -1 : 1;
    const strips = layout.strips[vessel]!;
    const ring = root ? 0 : strips;
    const rim = rings[vessel]! + ring * around;
    const { position } = forest;
    const centre = [position[3 * row]!, position[3 * row + 1]!, position[3 * row + 2]!] as const;
    const normal = [0, 1, 2].map((k) => sign * layout.axis[3 * vessel + k]!) as [number, number, number];
    const tree = forest.tree[row]!;
    const number = numbers[vessel]!;
    const drain = kinds?.[tree] === 'drain';
    const name = root
      ? drain
        ? `outlet_tree_${tree}`
        : `inlet_${tree}`
      : drain
        ? `inlet_vessel_${number}`
        : `outlet_${number}`;
    const patch = patches.length;
    patches.push({
      name,
      kind: root === drain ? 'outlet' : 'inlet',
      row,
      tree,
      vessel: number,
      centre,
      normal,
      radius: forest.radius[vessel]!,
    });
    const [ex, ey, ez] = [layout.side[3 * vessel]!, layout.side[3 * vessel + 1]!, layout.side[3 * vessel + 2]!];
    const [ux, uy, uz] = [layout.axis[3 * vessel]!, layout.axis[3 * vessel + 1]!, layout.axis[3 * vessel + 2]!];
    const fx = uy * ez - uz * ey;
    const fy = uz * ex - ux * ez;
    const fz = ux * ey - uy * ex;
    // The disc turns with the ring's stagger.
    const half = (ring & 1) === 1 ? Math.PI / around : 0;
    const a = layout.corner[vessel]!;
    const ca = a * Math.cos(half);
    const sa = a * Math.sin(half);
    const inside = out.vertices;
    for (let i = 0; i < disc.inner.length; i += 2) {
      const x = ca * disc.inner[i]! - sa * disc.inner[i + 1]!;
      const y = sa * disc.inner[i]! + ca * disc.inner[i + 1]!;
      out.addVertex(
        centre[0] + x * ex + y * fx,
        centre[1] + x * ey + y * fy,
        centre[2] + x * ez + y * fz,
        vessel,
        root ? 0 : 1,
      );
    }
    const at = (v: number): number => (v < around ? rim + v : inside + v - around);
    for (let i = 0; i < disc.triangle.length; i += 3) {
      const p = at(disc.triangle[i]!);
      const q = at(disc.triangle[i + 1]!);
      const r = at(disc.triangle[i + 2]!);
      if (root) out.addTriangle(p, r, q, patch, number);
      else out.addTriangle(p, q, r, patch, number);
    }
  }
  return patches;
}

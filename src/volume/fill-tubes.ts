import type { LumenMesh } from '../mesh/lumen.ts';
import type { TubeLayout } from '../mesh/tube-layout.ts';
import type { Forest } from '../tree/forest.ts';
import type { GrowingVolume } from './growing-volume.ts';
import type { SectionDisc } from './lumen-volume.ts';

/** Where the discs of every vessel's rings are. */
export interface TubeSections {
  readonly disc: SectionDisc;
  /** (n) rim corner 0 of each vessel's first ring; −1 at roots. The next ring's follow `around` later. */
  readonly rim: Int32Array;
  /** (n) first point inside each vessel's first ring; the next ring's follow `points − around` later. */
  readonly inside: Int32Array;
}

/** Point of a section: number of a corner of the disc, seen from a ring of a vessel. */
export function sectionPoint({ disc, rim, inside }: TubeSections, row: number, ring: number, corner: number): number {
  const { around, points } = disc;
  return corner < around
    ? rim[row]! + ring * around + corner
    : inside[row]! + ring * (points - around) + corner - around;
}

/** Adds the points inside the rings of every tube. */
export function addSections(
  out: GrowingVolume,
  mesh: Pick<LumenMesh, 'position'>,
  forest: Forest,
  layout: TubeLayout,
  disc: SectionDisc,
): TubeSections {
  const rim = new Int32Array(forest.count).fill(-1);
  const inside = new Int32Array(forest.count).fill(-1);
  const sections: TubeSections = { disc, rim, inside };
  let next = 0;
  for (let row = 0; row < forest.count; row++) {
    if (forest.parent[row]! < 0) continue;
    rim[row] = next;
    next += (layout.strips[row]! + 1) * disc.around;
  }
  for (let row = 0; row < forest.count; row++) {
    if (forest.parent[row]! < 0) continue;
    inside[row] = out.points;
    for (let ring = 0; ring <= layout.strips[row]!; ring++) addRing(out, mesh, sections, row, ring);
  }
  return sections;
}

/**
 * Adds the cells of every tube.
 *
 * Rings are staggered: a strip turns by half a step, on even rings one way and on odd ones back, so that corner j stands
 * over corner j and columns of prisms stay in their places. The turned quadrilaterals of the wall are cut in two
 * triangles, by the surface. Layers are prisms that stand on these triangles. Within them lies the core, prisms that
 * stand on the disc's triangles, but for those that touch the layers: they are cut in tetrahedra and pyramids so that
 * their outer faces fit.
 *
 * @param bare (n) 1 at nodes that have no layers: in the last strip before them the layers end
 */
export function fillTubes(
  out: GrowingVolume,
  forest: Forest,
  layout: TubeLayout,
  numbers: ArrayLike<number>,
  sections: TubeSections,
  bare: Uint8Array,
): void {
  const { points } = sections.disc;
  const strip: Strip = { low: new Int32Array(points), high: new Int32Array(points), even: true, vessel: 0 };
  for (let row = 0; row < forest.count; row++) {
    if (forest.parent[row]! < 0) continue;
    strip.vessel = numbers[row]!;
    const strips = layout.strips[row]!;
    for (let ring = 0; ring < strips; ring++) {
      for (let v = 0; v < points; v++) {
        strip.low[v] = sectionPoint(sections, row, ring, v);
        strip.high[v] = sectionPoint(sections, row, ring + 1, v);
      }
      strip.even = (ring & 1) === 0;
      const endsBelow = ring === 0 && bare[forest.parent[row]!] === 1;
      const endsAbove = ring === strips - 1 && bare[row] === 1;
      if (endsBelow || endsAbove) endLayers(out, sections.disc, strip, endsBelow, endsAbove);
      else addLayers(out, sections.disc, strip);
      addCore(out, sections.disc, strip);
    }
  }
}

/** What lies between two rings: the points of their discs. */
export interface Strip {
  readonly low: Int32Array;
  readonly high: Int32Array;
  /** Whether the lower ring is an even one. */
  even: boolean;
  vessel: number;
}

/** Puts points into a ring, in its plane: its frame is taken from the rim, which need not be looked up then. */
function addRing(
  out: GrowingVolume,
  mesh: Pick<LumenMesh, 'position'>,
  { disc, rim }: TubeSections,
  row: number,
  ring: number,
): void {
  const { around, points, place } = disc;
  const p = mesh.position;
  const start = 3 * (rim[row]! + ring * around);
  const along = out.along.values[start / 3]!;
  const centre = [0, 0, 0];
  const ex = [0, 0, 0];
  const ey = [0, 0, 0];
  // First harmonics of a regular polygon: the vectors to its corners at 0 and a quarter turn.
  for (let j = 0; j < around; j++) {
    const c = place[2 * j]!;
    const s = place[2 * j + 1]!;
    for (let k = 0; k < 3; k++) {
      const x = p[start + 3 * j + k]! - p[start + k]!;
      centre[k]! += x / around;
      ex[k]! += (2 * c * x) / around;
      ey[k]! += (2 * s * x) / around;
    }
  }
  for (let v = around; v < points; v++) {
    const a = place[2 * v]!;
    const b = place[2 * v + 1]!;
    out.addPoint(
      p[start]! + centre[0]! + a * ex[0]! + b * ey[0]!,
      p[start + 1]! + centre[1]! + a * ex[1]! + b * ey[1]!,
      p[start + 2]! + centre[2]! + a * ex[2]! + b * ey[2]!,
      row,
      along,
    );
  }
}

/** Adds the layers of a strip. */
export function addLayers(
  out: GrowingVolume,
  { around, layers }: SectionDisc,
  { low, high, even, vessel }: Strip,
): void {
  for (let l = 0; l < layers; l++) {
    const o = l * around;
    const i = o + around;
    for (let j = 0; j < around; j++) {
      const k = j + 1 === around ? 0 : j + 1;
      const [a, b, c, d] = [low[i + j]!, low[i + k]!, high[i + k]!, high[i + j]!];
      const [p, q, r, s] = [low[o + j]!, low[o + k]!, high[o + k]!, high[o + j]!];
      if (even) {
        out.addPrism(a, b, d, p, q, s, vessel);
        out.addPrism(b, c, d, q, r, s, vessel);
      } else {
        out.addPrism(a, b, c, p, q, r, vessel);
        out.addPrism(a, c, d, p, r, s, vessel);
      }
    }
  }
}

/**
 * Adds the layers of a strip where they end. Each column of two prisms is filled from its middle, so that its faces to its
 * neighbours stay whole and those where the layers end can be cut in triangles, as `wholeTriangles` cuts them.
 */
function endLayers(
  out: GrowingVolume,
  { around, layers }: SectionDisc,
  { low, high, even, vessel }: Strip,
  endsBelow: boolean,
  endsAbove: boolean,
): void {
  for (let l = 0; l < layers; l++) {
    const o = l * around;
    const i = o + around;
    for (let j = 0; j < around; j++) {
      const k = j + 1 === around ? 0 : j + 1;
      const [a, b, c, d] = [low[i + j]!, low[i + k]!, high[i + k]!, high[i + j]!];
      const [p, q, r, s] = [low[o + j]!, low[o + k]!, high[o + k]!, high[o + j]!];
      // Halfway between the edges that cut the wall's quadrilateral and its like within: few segments fold it much.
      const m = addMiddle(out, even ? [b, d, q, s] : [a, c, p, r]);
      if (even) {
        out.addTetrahedron(p, s, q, m, vessel);
        out.addTetrahedron(q, s, r, m, vessel);
        out.addTetrahedron(a, b, d, m, vessel);
        out.addTetrahedron(b, c, d, m, vessel);
      } else {
        out.addTetrahedron(p, r, q, m, vessel);
        out.addTetrahedron(p, s, r, m, vessel);
        out.addTetrahedron(a, b, c, m, vessel);
        out.addTetrahedron(a, c, d, m, vessel);
      }
      if (endsBelow) {
        out.addTetrahedron(p, q, b, m, vessel);
        out.addTetrahedron(p, b, a, m, vessel);
      } else out.addPyramid(p, q, b, a, m, vessel);
      if (endsAbove) {
        out.addTetrahedron(s, d, c, m, vessel);
        out.addTetrahedron(s, c, r, m, vessel);
      } else out.addPyramid(s, d, c, r, m, vessel);
      out.addPyramid(a, d, s, p, m, vessel);
      out.addPyramid(b, q, r, c, m, vessel);
    }
  }
}

function addMiddle(out: GrowingVolume, corners: readonly number[]): number {
  let [x, y, z, along] = [0, 0, 0, 0];
  const p = out.position.values;
  for (const v of corners) {
    x += p[3 * v]! / corners.length;
    y += p[3 * v + 1]! / corners.length;
    z += p[3 * v + 2]! / corners.length;
    along += out.along.values[v]! / corners.length;
  }
  return out.addPoint(x, y, z, out.row.values[corners[0]!]!, along);
}

/** (3 each) a whole section in triangles, layers too: counter-clockwise. */
export function wholeTriangles({ around, layers, triangle }: SectionDisc): Int32Array {
  const out: number[] = [];
  for (let l = 0; l < layers; l++) {
    const o = l * around;
    const i = o + around;
    for (let j = 0; j < around; j++) {
      const k = j + 1 === around ? 0 : j + 1;
      out.push(o + j, o + k, i + k, o + j, i + k, i + j);
    }
  }
  return Int32Array.from([...out, ...triangle]);
}

/** Adds what lies within the layers of a strip. */
export function addCore(
  out: GrowingVolume,
  { around, layers, triangle }: SectionDisc,
  { low, high, even, vessel }: Strip,
): void {
  const start = layers * around;
  const end = start + around;
  for (let t = 0; t < triangle.length; t += 3) {
    // The corner that lies on the rim alone, or the one that does not, goes first.
    let turn = 0;
    let onRim = 0;
    for (let k = 0; k < 3; k++) if (triangle[t + k]! < end) onRim++;
    if (onRim > 0) while (onRim === 1 ? triangle[t + turn]! >= end : triangle[t + turn]! < end) turn++;
    const a = triangle[t + turn]!;
    const b = triangle[t + ((turn + 1) % 3)]!;
    const c = triangle[t + ((turn + 2) % 3)]!;
    if (onRim === 0) {
      out.addPrism(low[a]!, low[b]!, low[c]!, high[a]!, high[b]!, high[c]!, vessel);
    } else if (onRim === 1) {
      // Faces on both sides of the rim's corner are cut from it upwards, the one across is whole.
      out.addTetrahedron(low[a]!, high[a]!, high[b]!, high[c]!, vessel);
      out.addPyramid(low[b]!, high[b]!, high[c]!, low[c]!, low[a]!, vessel);
    } else if (even) {
      // Cut from low c to high b as the wall is, and from both to high a.
      out.addTetrahedron(low[c]!, low[a]!, low[b]!, high[a]!, vessel);
      out.addTetrahedron(low[c]!, low[b]!, high[b]!, high[a]!, vessel);
      out.addTetrahedron(low[c]!, high[c]!, high[a]!, high[b]!, vessel);
    } else {
      out.addTetrahedron(low[b]!, low[c]!, low[a]!, high[a]!, vessel);
      out.addTetrahedron(low[b]!, low[c]!, high[a]!, high[c]!, vessel);
      out.addTetrahedron(low[b]!, high[b]!, high[c]!, high[a]!, vessel);
    }
  }
}

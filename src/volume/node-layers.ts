import { FILLET, type JunctionShape } from '../mesh/junction-shape.ts';
import { mostInward } from './inward-way.ts';

/** The wall of one node as seen from it, in units of its shape. Corners on rims come first. */
export interface NodeWall {
  readonly corners: number;
  readonly rimCorners: number;
  /** (3 corners) */
  readonly position: Float64Array;
  /** (3 each) counter-clockwise seen from outside. */
  readonly triangle: Int32Array;
  /** (3 corners) way from the wall to the inside of the layers; known on rims. */
  readonly shift: Float64Array;
  /** (3 rimCorners) unit vector along the tube towards the node; zeros where another node has the rim too. */
  readonly towards: Float64Array;
}

/** How fast layers may thicken with the distance from a thinner tube. */
const GRADING = 1.2;
/** Least −cosine between the way in and the normal of a triangle that meets there. */
const LEAN = 0.5;
/** The same on rims, and how far ways in lean towards the node there to come to it, over how far they lead inwards. */
const RIM_LEAN = 0.25;
const TILTS = [0, 0.25, 0.5, 0.75, 1, 1.4, 2, 3];
const ROUNDS = 40;
/** Rounds in which layers are thinned until they are well shaped, and not just sound. */
const CHOOSY = 20;

/**
 * Lays the layers of a node's wall: inwards along the gradient of the shape, as thick as on the tubes, evened out so that
 * they pass into those of the rims; thinner where cells would be turned over or hidden from the node. Where a crease runs
 * up to a rim, the rim's own layers lean towards the node: their shifts are changed.
 *
 * @param thickness of all layers, over the radius of the tube they lie on
 * @param fraction  as in SectionDisc
 * @returns whether every prism is sound and the inside of the layers is seen from the node all round
 */
export function layNodeLayers(
  shape: JunctionShape,
  wall: NodeWall,
  thickness: number,
  fraction: Float64Array,
): boolean {
  const { corners, rimCorners, position, shift } = wall;
  const depth = new Float64Array(corners);
  const faces = facesAtCorners(wall);
  tiltRims(wall, faces);
  for (let v = 0; v < corners; v++) {
    if (v < rimCorners) {
      depth[v] = length(shift, 3 * v);
      continue;
    }
    shape.lookAt(position[3 * v]!, position[3 * v + 1]!, position[3 * v + 2]!);
    shape.evaluate();
    const scale = 1 / Math.sqrt(shape.gx * shape.gx + shape.gy * shape.gy + shape.gz * shape.gz);
    shift[3 * v] = -scale * shape.gx;
    shift[3 * v + 1] = -scale * shape.gy;
    shift[3 * v + 2] = -scale * shape.gz;
    depth[v] = thickness * localRadius(shape);
  }
  const share = neighbourCounts(wall);
  for (let round = 0; round < 4; round++) evenOut(wall, depth, 1, share);
  // Rims keep their own way in; unit vectors until here.
  const way = Float64Array.from(shift);
  for (let v = 0; v < rimCorners; v++) normalise(way, 3 * v, depth[v]! > 0);
  for (let round = 0; round < 2; round++) evenOut(wall, way, 3, share);
  turnInwards(wall, way, faces);
  for (let v = rimCorners; v < corners; v++) {
    for (let k = 0; k < 3; k++) shift[3 * v + k] = depth[v]! * way[3 * v + k]!;
  }
  return thinOut(wall, fraction);
}

/** Radius of the nearest tube, or more where that is thinner than others: grown with the distance from it. */
function localRadius(shape: JunctionShape): number {
  let best = Infinity;
  for (let i = 0; i < shape.count; i++) {
    const r = shape.radius[i]!;
    const away = shape.distance(i) - (1 + FILLET) * r;
    best = Math.min(best, r + (away > 0 ? GRADING * away : 0));
  }
  return best;
}

/** (3 faces) unit normals out. */
function triangleNormals({ triangle, position }: NodeWall): Float64Array {
  const out = new Float64Array(triangle.length);
  for (let t = 0; t < triangle.length; t += 3) {
    const a = 3 * triangle[t]!;
    const b = 3 * triangle[t + 1]!;
    const c = 3 * triangle[t + 2]!;
    for (let k = 0; k < 3; k++) {
      const m = (k + 1) % 3;
      const n = (k + 2) % 3;
      out[t + k] =
        (position[b + m]! - position[a + m]!) * (position[c + n]! - position[a + n]!) -
        (position[b + n]! - position[a + n]!) * (position[c + m]! - position[a + m]!);
    }
    normalise(out, t, true);
  }
  return out;
}

/** Triangles that meet in each corner; each has two neighbours there. */
function neighbourCounts({ triangle, corners }: NodeWall): Float64Array {
  const out = new Float64Array(corners);
  for (const v of triangle) out[v]! += 2;
  return out;
}

/** Replaces the values at free corners by the mean of their own and their neighbours'; unit vectors stay of unit length. */
function evenOut(wall: NodeWall, values: Float64Array, width: 1 | 3, share: Float64Array): void {
  const { triangle, corners, rimCorners } = wall;
  const sum = new Float64Array(values.length);
  for (let t = 0; t < triangle.length; t += 3) {
    for (let k = 0; k < 3; k++) {
      const v = triangle[t + k]!;
      for (let m = 1; m < 3; m++) {
        const w = triangle[t + ((k + m) % 3)]!;
        for (let i = 0; i < width; i++) sum[width * v + i]! += values[width * w + i]!;
      }
    }
  }
  for (let v = rimCorners; v < corners; v++) {
    for (let i = 0; i < width; i++)
      values[width * v + i] = 0.5 * values[width * v + i]! + (0.5 * sum[width * v + i]!) / share[v]!;
    if (width === 3) normalise(values, 3 * v, true);
  }
}

/** Normals of the triangles that meet in each corner: those of corner v from 3 start[v] on. */
interface CornerFaces {
  readonly start: Int32Array;
  readonly normal: Float64Array;
}

function facesAtCorners(wall: NodeWall): CornerFaces {
  const { triangle, corners } = wall;
  const normals = triangleNormals(wall);
  const start = new Int32Array(corners + 1);
  for (const v of triangle) start[v + 1]!++;
  for (let v = 0; v < corners; v++) start[v + 1]! += start[v]!;
  const fill = start.slice(0, corners);
  const normal = new Float64Array(3 * triangle.length);
  for (let i = 0; i < triangle.length; i++) {
    const t = i - (i % 3);
    normal.set(normals.subarray(t, t + 3), 3 * fill[triangle[i]!]!++);
  }
  return { start, normal };
}

/** Least −cosine of a way from a corner, of any length, with the normals of what meets there. */
function leastInward({ start, normal }: CornerFaces, v: number, x: number, y: number, z: number): number {
  let least = Infinity;
  for (let i = 3 * start[v]!; i < 3 * start[v + 1]!; i += 3)
    least = Math.min(least, -(x * normal[i]! + y * normal[i + 1]! + z * normal[i + 2]!));
  return least / Math.sqrt(x * x + y * y + z * z);
}

/** Leans the ways in on rims towards the node where they would not lead well behind the node's wall. */
function tiltRims({ rimCorners, shift, towards }: NodeWall, faces: CornerFaces): void {
  const tilt = new Float64Array(rimCorners);
  const depth = new Float64Array(rimCorners);
  for (let v = 0; v < rimCorners; v++) {
    depth[v] = length(shift, 3 * v);
    let most = -Infinity;
    for (const lean of TILTS) {
      if (most >= RIM_LEAN || !(depth[v]! > 0)) break;
      const at = (k: number): number => shift[3 * v + k]! + lean * depth[v]! * towards[3 * v + k]!;
      const least = leastInward(faces, v, at(0), at(1), at(2));
      if (least <= most) continue;
      most = least;
      tilt[v] = lean;
    }
  }
  const best = new Float64Array(3);
  // Neighbours on the rim lean with them.
  const near = Float64Array.from(tilt);
  for (let round = 0; round < 2; round++) {
    for (let v = 0; v < rimCorners; v++) {
      for (const w of [v - 1, v + 1]) {
        const same =
          w >= 0 && w < rimCorners && towards[3 * v] === towards[3 * w] && towards[3 * v + 1] === towards[3 * w + 1];
        if (same) near[v] = Math.max(near[v]!, 0.5 * tilt[w]!);
      }
    }
    tilt.set(near);
  }
  for (let v = 0; v < rimCorners; v++) {
    const [x, y, z] = [shift[3 * v]!, shift[3 * v + 1]!, shift[3 * v + 2]!];
    // No longer than before, for the tube's cells have to follow.
    const scale = 1 / Math.sqrt(1 + tilt[v]! * tilt[v]!);
    for (let k = 0; k < 3; k++)
      shift[3 * v + k] = scale * (shift[3 * v + k]! + tilt[v]! * depth[v]! * towards[3 * v + k]!);
    if (!(depth[v]! > 0) || length(towards, 3 * v) === 0) continue;
    if (leastInward(faces, v, shift[3 * v]!, shift[3 * v + 1]!, shift[3 * v + 2]!) > RIM_LEAN / 2) continue;
    // As squarely as can be behind the node's wall and the tube's.
    const here = Float64Array.of(...faces.normal.subarray(3 * faces.start[v]!, 3 * faces.start[v + 1]!), -x, -y, -z);
    normalise(here, here.length - 3, true);
    mostInward(here, here.length / 3, best);
    for (let k = 0; k < 3; k++) shift[3 * v + k] = depth[v]! * best[k]!;
  }
}

/** Replaces ways in that do not lead well behind all triangles that meet there by those that lead best. */
function turnInwards({ corners, rimCorners }: NodeWall, way: Float64Array, faces: CornerFaces): void {
  const { start, normal } = faces;
  const best = new Float64Array(3);
  for (let v = rimCorners; v < corners; v++) {
    if (leastInward(faces, v, way[3 * v]!, way[3 * v + 1]!, way[3 * v + 2]!) > LEAN) continue;
    const here = normal.subarray(3 * start[v]!, 3 * start[v + 1]!);
    mostInward(here, here.length / 3, best);
    way.set(best, 3 * v);
  }
}

/** Makes layers thinner at free corners, and on rims that no other node has, until all is sound; whether it is. */
function thinOut(wall: NodeWall, fraction: Float64Array): boolean {
  const { triangle, corners, rimCorners, shift, towards } = wall;
  const bad = new Uint8Array(corners);
  for (let round = 0; ; round++) {
    bad.fill(0);
    let count = 0;
    for (let t = 0; t < triangle.length; t += 3) {
      if (soundStack(wall, t, fraction, round < CHOOSY)) continue;
      count++;
      for (let k = 0; k < 3; k++) bad[triangle[t + k]!] = 1;
    }
    if (count === 0) return true;
    if (round === ROUNDS) return false;
    for (let v = 0; v < corners; v++) {
      if (bad[v] === 0 || (v < rimCorners && length(towards, 3 * v) === 0)) continue;
      for (let i = 0; i < 3; i++) shift[3 * v + i]! *= 0.8;
    }
  }
}

/** Least cosine between the way in and the normal at a corner of a layer. */
const LEAST = 0.06;
/** Least height of a face over the node, over its size. */
const SEEN = 0.02;
/** Cosine that is good enough within the layers. */
const WELL = 0.35;

/** Whether the prisms over a triangle turn nowhere, or little where choosy, and the node sees the innermost face. */
function soundStack(
  { triangle, position, shift }: NodeWall,
  t: number,
  fraction: Float64Array,
  choosy: boolean,
): boolean {
  // Thinner layers do not change how well ways lead in at the wall itself.
  const wanted = [LEAST, LEAST, LEAST];
  const last = fraction.length - 1;
  const p = new Float64Array(9);
  for (let l = 0; l <= last; l++) {
    // Share of the whole way in.
    const share = last === 0 ? 0 : (1 - fraction[l]!) / (1 - fraction[last]!);
    for (let k = 0; k < 3; k++) {
      const v = 3 * triangle[t + k]!;
      for (let i = 0; i < 3; i++) p[3 * k + i] = position[v + i]! + share * shift[v + i]!;
    }
    const ux = p[3]! - p[0]!;
    const uy = p[4]! - p[1]!;
    const uz = p[5]! - p[2]!;
    const vx = p[6]! - p[0]!;
    const vy = p[7]! - p[1]!;
    const vz = p[8]! - p[2]!;
    const nx = uy * vz - uz * vy;
    const ny = uz * vx - ux * vz;
    const nz = ux * vy - uy * vx;
    const area = Math.sqrt(nx * nx + ny * ny + nz * nz);
    if (!(area > 0)) return false;
    for (let k = 0; k < 3 && last > 0; k++) {
      const v = 3 * triangle[t + k]!;
      const dot = -(nx * shift[v]! + ny * shift[v + 1]! + nz * shift[v + 2]!);
      const cosine = dot / (area * length(shift, v));
      if (!(cosine > wanted[k]!)) return false;
      if (l === 0 && choosy) wanted[k] = Math.max(LEAST, Math.min(WELL, 0.6 * cosine));
    }
    if (l < last) continue;
    const seen = nx * p[0]! + ny * p[1]! + nz * p[2]!;
    if (!(seen > SEEN * area * Math.sqrt(area))) return false;
  }
  return true;
}

function length(values: Float64Array, at: number): number {
  const [x, y, z] = [values[at]!, values[at + 1]!, values[at + 2]!];
  return Math.sqrt(x * x + y * y + z * z);
}

function normalise(values: Float64Array, at: number, there: boolean): void {
  const scale = there ? 1 / length(values, at) : 0;
  for (let k = 0; k < 3; k++) values[at + k]! *= scale;
}

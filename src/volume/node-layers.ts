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
}

/** How fast layers may thicken with the distance from a thinner tube. */
const GRADING = 1.2;
/** Least −cosine between the way in and the normal of a triangle that meets there. */
const LEAN = 0.5;
const ROUNDS = 40;

/**
 * Lays the layers of a node's wall: inwards along the gradient of the shape, as thick as on the tubes, evened out so that
 * they pass into those of the rims; thinner where cells would be turned over or hidden from the node.
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
  const normals = triangleNormals(wall);
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
  turnInwards(wall, way, normals);
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

/** Replaces ways in that do not lead well behind all triangles that meet there by those that lead best. */
function turnInwards({ triangle, corners, rimCorners }: NodeWall, way: Float64Array, normals: Float64Array): void {
  const start = new Int32Array(corners + 1);
  for (const v of triangle) start[v + 1]!++;
  for (let v = 0; v < corners; v++) start[v + 1]! += start[v]!;
  const fill = start.slice(0, corners);
  const met = new Float64Array(3 * triangle.length);
  for (let i = 0; i < triangle.length; i++) {
    const t = i - (i % 3);
    met.set(normals.subarray(t, t + 3), 3 * fill[triangle[i]!]!++);
  }
  const best = new Float64Array(3);
  for (let v = rimCorners; v < corners; v++) {
    const here = met.subarray(3 * start[v]!, 3 * start[v + 1]!);
    let least = Infinity;
    for (let i = 0; i < here.length; i += 3)
      least = Math.min(
        least,
        -(way[3 * v]! * here[i]! + way[3 * v + 1]! * here[i + 1]! + way[3 * v + 2]! * here[i + 2]!),
      );
    if (least > LEAN) continue;
    mostInward(here, here.length / 3, best);
    way.set(best, 3 * v);
  }
}

/** Makes layers thinner at free corners until all is sound; whether it is. */
function thinOut(wall: NodeWall, fraction: Float64Array): boolean {
  const { triangle, corners, rimCorners, shift } = wall;
  const bad = new Uint8Array(corners);
  for (let round = 0; ; round++) {
    bad.fill(0);
    let count = 0;
    for (let t = 0; t < triangle.length; t += 3) {
      if (soundStack(wall, t, fraction)) continue;
      count++;
      for (let k = 0; k < 3; k++) bad[triangle[t + k]!] = 1;
    }
    if (count === 0) return true;
    if (round === ROUNDS) return false;
    for (let v = rimCorners; v < corners; v++) {
      if (bad[v] === 0) continue;
      for (let i = 0; i < 3; i++) shift[3 * v + i]! *= 0.8;
    }
  }
}

/** Least volume at a corner of a layer, and before the node, over what a straight stack or an upright fan would have. */
const LEAST = 0.02;

/** Whether the prisms over a triangle turn nowhere and the node sees the innermost face. */
function soundStack({ triangle, position, shift }: NodeWall, t: number, fraction: Float64Array): boolean {
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
      if (!(dot > LEAST * area * length(shift, v))) return false;
    }
    if (l < last) continue;
    const seen = nx * p[0]! + ny * p[1]! + nz * p[2]!;
    if (!(seen > LEAST * area * Math.sqrt(area))) return false;
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

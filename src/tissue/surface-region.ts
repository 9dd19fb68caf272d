import type { TriangleSurface } from '../core/surface.ts';
import type { CheckedSurface } from './check-surface.ts';
import { halfDiagonal, type Region } from './region.ts';
import { windingNumber } from './surface-measures.ts';
import { edgeConvexity, surfaceNormals } from './surface-normals.ts';
import { buildTriangleTree } from './triangle-tree.ts';
import { marchTube } from './tube.ts';

/*
 * Lab notes. Depth is exact: the closest triangle by branch and bound over a tree of boxes, the sign from the
 * angle-weighted normal of the feature (face, edge, corner) the foot lies on. Growth mostly asks "deeper than?", so a
 * lattice of depths, filled when first needed, answers from |depth at the nearest node| ± distance to the node; it also
 * gives the search its first bound. Lattice values are exact depths, and the search looks a little farther than its
 * best so far (`margin`), so that rounding in a box's distance cannot hide the nearest triangle: answers do not depend,
 * to the last bit, on what was asked before.
 */

/** Lattice nodes over the box (4 MB). */
const NODES = 1 << 19;
/** Cosine between the way to the foot and the feature's normal below which the sign is taken from the winding number. */
const DOUBTFUL = 1e-6;

/**
 * The inside of a closed triangle surface; depth is exact on both sides, to rounding.
 *
 * @param surface that passed `checkSurface`, in m
 * @param checked what `checkSurface` returned for it (at whatever scale)
 * @param volume  m³
 * Source: sign by angle-weighted pseudonormal, J. A. Bærentzen & H. Aanæs (2005), IEEE TVCG 11:243; closest point of a
 *         triangle, C. Ericson, Real-Time Collision Detection (2005), 5.1.5; both from memory.
 * Cost:   see tests/bench/tissue.bench.ts; allocates nothing per question.
 */
export function surfaceRegion(surface: TriangleSurface, checked: CheckedSurface, volume: number): Region {
  const { position, triangle } = surface;
  const { box, link, size, order } = buildTriangleTree(surface);
  const { faceNormal, edgeNormal, cornerNormal } = surfaceNormals(surface, checked.topology);
  const min = [box[0]!, box[1]!, box[2]!] as const;
  const max = [box[3]!, box[4]!, box[5]!] as const;
  // Corners of the triangles in tree order, side by side for the cache.
  const corner = new Float64Array(9 * order.length);
  for (let i = 0; i < order.length; i++)
    for (let k = 0; k < 3; k++)
      for (let axis = 0; axis < 3; axis++)
        corner[9 * i + 3 * k + axis] = position[3 * triangle[3 * order[i]! + k]! + axis]!;
  const stackNode = new Int32Array(128);
  const stackBound = new Float64Array(128);

  const size2 =
    (max[0] - min[0]) * (max[0] - min[0]) +
    (max[1] - min[1]) * (max[1] - min[1]) +
    (max[2] - min[2]) * (max[2] - min[2]);
  const margin = 1e-19 * size2;
  // Covers feet kept in single precision, coordinates far from the origin included.
  const loose =
    1e-6 *
    Math.max(
      Math.abs(min[0]),
      Math.abs(min[1]),
      Math.abs(min[2]),
      Math.abs(max[0]),
      Math.abs(max[1]),
      Math.abs(max[2]),
    );

  /** Foot of the last search: a point of the surface, and near the next foot where questions come in some order. */
  const foot = Float64Array.of(position[0]!, position[1]!, position[2]!);

  /** Squared distance to a point of the surface, widened by far more than its rounding. */
  function reach2(x: number, y: number, z: number, on: Float64Array | Float32Array, at: number): number {
    const dx = x - on[at]!;
    const dy = y - on[at + 1]!;
    const dz = z - on[at + 2]!;
    const far = Math.sqrt(dx * dx + dy * dy + dz * dz) + loose;
    return far * far;
  }

  /** Signed distance, exact, where it is known to be at most √limit (or limit is infinite). NaN where that was wrong. */
  function search(x: number, y: number, z: number, limit: number, knownSign: number): number {
    let best = limit;
    let cut = best * (1 + 1e-12) + margin;
    let place = -1;
    let feature = 0;
    let fx = 0;
    let fy = 0;
    let fz = 0;
    let top = 0;
    stackNode[0] = 0;
    stackBound[0] = 0;
    top = 1;
    while (top > 0) {
      top--;
      if (stackBound[top]! > cut) continue;
      let node = stackNode[top]!;
      // Down to a leaf by the nearer child, the other one put by.
      while (size[node] === 0) {
        const one = node + 1;
        const two = link[node]!;
        const d1 = boxDistance(box, 6 * one, x, y, z);
        const d2 = boxDistance(box, 6 * two, x, y, z);
        const nearFirst = d1 <= d2;
        const farBound = nearFirst ? d2 : d1;
        if (farBound <= cut) {
          stackNode[top] = nearFirst ? two : one;
          stackBound[top] = farBound;
          top++;
        }
        node = nearFirst ? one : two;
        if ((nearFirst ? d1 : d2) > cut) {
          node = -1;
          break;
        }
      }
      if (node < 0) continue;
      const end = link[node]! + size[node]!;
      for (let i = link[node]!; i < end; i++) {
        const at = 9 * i;
        const ax = corner[at]!;
        const ay = corner[at + 1]!;
        const az = corner[at + 2]!;
        const ux = corner[at + 3]! - ax;
        const uy = corner[at + 4]! - ay;
        const uz = corner[at + 5]! - az;
        const vx = corner[at + 6]! - ax;
        const vy = corner[at + 7]! - ay;
        const vz = corner[at + 8]! - az;
        const wx = x - ax;
        const wy = y - ay;
        const wz = z - az;
        const uw = ux * wx + uy * wy + uz * wz;
        const vw = vx * wx + vy * wy + vz * wz;
        const uu = ux * ux + uy * uy + uz * uz;
        const vv = vx * vx + vy * vy + vz * vz;
        const uv = ux * vx + uy * vy + uz * vz;
        // Barycentric tests by regions; (s, t) are the foot's shares of u and v.
        let s = 0;
        let t = 0;
        let kind = 0;
        const bu = uw - uu;
        const bv = vw - uv;
        const cu = uw - uv;
        const cv = vw - vv;
        if (uw <= 0 && vw <= 0) kind = 4;
        else if (bu >= 0 && bv <= bu) {
          s = 1;
          kind = 5;
        } else if (cv >= 0 && cu <= cv) {
          t = 1;
          kind = 6;
        } else {
          const vc = uw * bv - bu * vw;
          const vb = cu * vw - uw * cv;
          const va = bu * cv - cu * bv;
          if (vc <= 0 && uw >= 0 && bu <= 0) {
            s = uw / (uw - bu);
            kind = 1;
          } else if (vb <= 0 && vw >= 0 && cv <= 0) {
            t = vw / (vw - cv);
            kind = 3;
          } else if (va <= 0 && bv - bu >= 0 && cu - cv >= 0) {
            t = (bv - bu) / (bv - bu + (cu - cv));
            s = 1 - t;
            kind = 2;
          } else {
            const sum = va + vb + vc;
            s = vb / sum;
            t = vc / sum;
          }
        }
        const rx = wx - s * ux - t * vx;
        const ry = wy - s * uy - t * vy;
        const rz = wz - s * uz - t * vz;
        const squared = rx * rx + ry * ry + rz * rz;
        if (squared <= best) {
          best = squared;
          cut = best * (1 + 1e-12) + margin;
          place = i;
          feature = kind;
          fx = rx;
          fy = ry;
          fz = rz;
        }
      }
    }
    if (place < 0) return Number.NaN;
    foot[0] = x - fx;
    foot[1] = y - fy;
    foot[2] = z - fz;
    const distance = Math.sqrt(best);
    if (knownSign !== 0 || distance === 0) return knownSign * distance;
    const t = order[place]!;
    const normal = feature === 0 ? faceNormal : feature < 4 ? edgeNormal : cornerNormal;
    const row = 3 * (feature === 0 ? t : feature < 4 ? 3 * t + feature - 1 : triangle[3 * t + feature - 4]!);
    const along = fx * normal[row]! + fy * normal[row + 1]! + fz * normal[row + 2]!;
    if (along > DOUBTFUL * distance) return -distance;
    if (along < -DOUBTFUL * distance) return distance;
    return windingNumber(surface, x, y, z) > 0.5 ? distance : -distance;
  }

  // The lattice: nodes at the corners and all through the box.
  const [sx, sy, sz] = [max[0] - min[0], max[1] - min[1], max[2] - min[2]];
  const step = Math.cbrt((sx * sy * sz) / NODES);
  const nx = Math.max(2, Math.ceil(sx / step) + 1);
  const ny = Math.max(2, Math.ceil(sy / step) + 1);
  const nz = Math.max(2, Math.ceil(sz / step) + 1);
  const hx = sx / (nx - 1);
  const hy = sy / (ny - 1);
  const hz = sz / (nz - 1);
  const lattice = new Float64Array(nx * ny * nz).fill(Number.NaN);
  const latticeFoot = new Float32Array(3 * lattice.length);
  const slack = 1e-12 * halfDiagonal(sx, sy, sz);
  const scratch = new Float64Array(1);

  /** Row of the lattice node nearest to a point; the distance to it is left in `scratch`. */
  function nearest(x: number, y: number, z: number): number {
    const i = clampRow((x - min[0]) / hx, nx);
    const j = clampRow((y - min[1]) / hy, ny);
    const k = clampRow((z - min[2]) / hz, nz);
    const dx = x - (min[0] + i * hx);
    const dy = y - (min[1] + j * hy);
    const dz = z - (min[2] + k * hz);
    scratch[0] = Math.sqrt(dx * dx + dy * dy + dz * dz) + slack;
    return (k * ny + j) * nx + i;
  }

  /** Depth at a lattice node, found when first asked for. */
  function nodeDepth(row: number): number {
    const known = lattice[row]!;
    if (!Number.isNaN(known)) return known;
    const i = row % nx;
    const j = ((row - i) / nx) % ny;
    const k = ((row - i) / nx - j) / ny;
    const found = seeded(min[0] + i * hx, min[1] + j * hy, min[2] + k * hz, Number.POSITIVE_INFINITY, 0);
    lattice[row] = found;
    latticeFoot.set(foot, 3 * row);
    return found;
  }

  /** The search, given what is known: a bound, the sign or 0, and the foot of the last question. */
  function seeded(x: number, y: number, z: number, limit: number, sign: number): number {
    const found = search(x, y, z, Math.min(limit, reach2(x, y, z, foot, 0)), sign);
    return Number.isNaN(found) ? search(x, y, z, Number.POSITIVE_INFINITY, 0) : found;
  }

  function exact(x: number, y: number, z: number, row: number, apart: number): number {
    const node = lattice[row]!;
    const sign = Math.abs(node) > apart ? (node > 0 ? 1 : -1) : 0;
    return seeded(x, y, z, reach2(x, y, z, latticeFoot, 3 * row), sign);
  }

  function depth(x: number, y: number, z: number): number {
    const row = nearest(x, y, z);
    // A node nobody asked for is not worth a search of its own.
    if (Number.isNaN(lattice[row]!)) return seeded(x, y, z, Number.POSITIVE_INFINITY, 0);
    return exact(x, y, z, row, scratch[0]!);
  }

  /** The lattice's bound where it is well above `need`, so that a march loses little of its step; else the depth. */
  function roughDepth(x: number, y: number, z: number, need: number): number {
    const row = nearest(x, y, z);
    const apart = scratch[0]!;
    const node = nodeDepth(row);
    const bound = node - apart;
    if (bound >= need && bound - need >= 2 * apart) return bound;
    return node + apart < need ? node + apart : exact(x, y, z, row, apart);
  }

  const region: Region = {
    min,
    max,
    convex: checked.pieces === 1 && checked.hollows === 0 && edgeConvexity(surface, checked.topology),
    volume,
    depth,
    deeperThan(x, y, z, need) {
      const row = nearest(x, y, z);
      const apart = scratch[0]!;
      const node = nodeDepth(row);
      if (node - apart >= need) return true;
      if (node + apart < need) return false;
      return exact(x, y, z, row, apart) >= need;
    },
    shallowerThan(x, y, z, limit) {
      const row = nearest(x, y, z);
      const apart = scratch[0]!;
      const node = nodeDepth(row);
      if (node + apart <= limit) return true;
      if (node - apart > limit) return false;
      return exact(x, y, z, row, apart) <= limit;
    },
    roughDepth,
    holdsTube: (ax, ay, az, bx, by, bz, need) => marchTube(region, ax, ay, az, bx, by, bz, need),
  };
  return region;
}

function clampRow(at: number, rows: number): number {
  const row = Math.round(at);
  return row > 0 ? (row < rows ? row : rows - 1) : 0;
}

/** Squared distance from a point to a box of the tree. */
function boxDistance(box: Float64Array, at: number, x: number, y: number, z: number): number {
  const lx = box[at]! - x;
  const hx = x - box[at + 3]!;
  const ly = box[at + 1]! - y;
  const hy = y - box[at + 4]!;
  const lz = box[at + 2]! - z;
  const hz = z - box[at + 5]!;
  // At most one of each pair is positive; without branches, which the search cannot predict.
  const dx = 0.5 * (lx + Math.abs(lx) + hx + Math.abs(hx));
  const dy = 0.5 * (ly + Math.abs(ly) + hy + Math.abs(hy));
  const dz = 0.5 * (lz + Math.abs(lz) + hz + Math.abs(hz));
  return dx * dx + dy * dy + dz * dz;
}

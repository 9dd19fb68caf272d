import { type NamedTriangles, trianglesByPatch } from './mesh-surface.ts';

/** A surface taken apart into patches that share no corner: those on a rim stand once for each patch that has them. */
export interface PatchParts {
  /** Corners of patch p are vertex[vertexStart[p]] … vertex[vertexStart[p + 1] − 1], rows of the surface. */
  readonly vertexStart: Int32Array;
  readonly vertex: Int32Array;
  /** Triangles of patch p begin at triangle number triangleStart[p]. */
  readonly triangleStart: Int32Array;
  /** (3f) corners, counted from the first of their patch. */
  readonly corner: Uint32Array;
}

/** Cost: O(v + f), two passes. */
export function takeApart(surface: Pick<NamedTriangles, 'position' | 'triangle' | 'patch' | 'patches'>): PatchParts {
  const { triangle, patches } = surface;
  const { start, list } = trianglesByPatch(surface);
  const vertices = surface.position.length / 3;
  const vertexStart = new Int32Array(patches.length + 1);
  // Patch that a vertex was met in last.
  const met = new Int32Array(vertices).fill(-1);
  for (let p = 0; p < patches.length; p++) {
    let count = vertexStart[p]!;
    for (let i = 3 * start[p]!; i < 3 * start[p + 1]!; i++) {
      const v = cornerAt(triangle, list, i);
      if (met[v] === p) continue;
      met[v] = p;
      count++;
    }
    vertexStart[p + 1] = count;
  }
  const vertex = new Int32Array(vertexStart[patches.length]!);
  const corner = new Uint32Array(triangle.length);
  const local = new Int32Array(vertices);
  met.fill(-1);
  for (let p = 0; p < patches.length; p++) {
    const first = vertexStart[p]!;
    let count = 0;
    for (let i = 3 * start[p]!; i < 3 * start[p + 1]!; i++) {
      const v = cornerAt(triangle, list, i);
      if (met[v] !== p) {
        met[v] = p;
        local[v] = count;
        vertex[first + count++] = v;
      }
      corner[i] = local[v]!;
    }
  }
  return { vertexStart, vertex, triangleStart: start, corner };
}

function cornerAt(triangle: Int32Array, list: Int32Array, i: number): number {
  const place = Math.floor(i / 3);
  return triangle[3 * list[place]! + (i - 3 * place)]!;
}

/**
 * Unit normals at the corners of the parts: those of the triangles round a corner, weighted by area, within its patch, so
 * that walls are smooth and rims of caps sharp.
 *
 * @returns (3 corners); (0, 0, 1) where triangles have no area
 */
export function partNormals(parts: PatchParts, position: Float64Array): Float32Array {
  const { vertexStart, vertex, triangleStart, corner } = parts;
  const sum = new Float64Array(3 * vertex.length);
  for (let p = 0; p + 1 < triangleStart.length; p++) {
    const first = vertexStart[p]!;
    for (let t = triangleStart[p]!; t < triangleStart[p + 1]!; t++) {
      const i = first + corner[3 * t]!;
      const j = first + corner[3 * t + 1]!;
      const k = first + corner[3 * t + 2]!;
      const a = 3 * vertex[i]!;
      const b = 3 * vertex[j]!;
      const c = 3 * vertex[k]!;
      const ux = position[b]! - position[a]!;
      const uy = position[b + 1]! - position[a + 1]!;
      const uz = position[b + 2]! - position[a + 2]!;
      const vx = position[c]! - position[a]!;
      const vy = position[c + 1]! - position[a + 1]!;
      const vz = position[c + 2]! - position[a + 2]!;
      const nx = uy * vz - uz * vy;
      const ny = uz * vx - ux * vz;
      const nz = ux * vy - uy * vx;
      for (const at of [3 * i, 3 * j, 3 * k]) {
        sum[at]! += nx;
        sum[at + 1]! += ny;
        sum[at + 2]! += nz;
      }
    }
  }
  const normal = new Float32Array(sum.length);
  for (let at = 0; at < sum.length; at += 3) {
    const [x, y, z] = [sum[at]!, sum[at + 1]!, sum[at + 2]!];
    const length = Math.hypot(x, y, z);
    if (length > 0) {
      normal[at] = x / length;
      normal[at + 1] = y / length;
      normal[at + 2] = z / length;
    } else normal[at + 2] = 1;
  }
  return normal;
}

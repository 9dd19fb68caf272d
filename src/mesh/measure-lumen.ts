import type { LumenMesh } from './lumen.ts';

/** What a closed surface can be judged by without knowing how it was made. */
export interface LumenFigures {
  readonly vertices: number;
  readonly edges: number;
  readonly triangles: number;
  /** Edges without exactly two triangles. */
  readonly openEdges: number;
  /** Edges that both triangles run through the same way. */
  readonly misorientedEdges: number;
  readonly components: number;
  /** V − E + F; 2 a component where nothing has a handle. */
  readonly euler: number;
  /** rad */
  readonly smallestAngle: number;
  /** m */
  readonly longestEdge: number;
  /** m³, signed: positive with normals out. */
  readonly volume: number;
  /** m², caps and all. */
  readonly area: number;
  /** m², the wall alone. */
  readonly wallArea: number;
}

/**
 * Measures a lumen surface.
 *
 * Cost: O(f log f), two sorted columns of 3f numbers.
 */
export function measureLumen(mesh: Pick<LumenMesh, 'position' | 'triangle' | 'patch'>): LumenFigures {
  const { position, triangle, patch } = mesh;
  const vertices = position.length / 3;
  const faces = triangle.length / 3;
  const parent = new Int32Array(vertices);
  for (let v = 0; v < vertices; v++) parent[v] = v;
  const find = (v: number): number => {
    let at = v;
    while (parent[at] !== at) {
      parent[at] = parent[parent[at]!]!;
      at = parent[at]!;
    }
    return at;
  };
  // An edge a < b becomes 2 (a · vertices + b), plus 1 where it is run from b to a.
  const keys = new Float64Array(triangle.length);
  let smallest = Math.PI;
  let longest = 0;
  let volume = 0;
  let area = 0;
  let wallArea = 0;
  const [ox, oy, oz] = [position[0] ?? 0, position[1] ?? 0, position[2] ?? 0];
  for (let t = 0; t < faces; t++) {
    const a = triangle[3 * t]!;
    const b = triangle[3 * t + 1]!;
    const c = triangle[3 * t + 2]!;
    for (let k = 0; k < 3; k++) {
      const p = triangle[3 * t + k]!;
      const q = triangle[3 * t + (k === 2 ? 0 : k + 1)]!;
      keys[3 * t + k] = p < q ? 2 * (p * vertices + q) : 2 * (q * vertices + p) + 1;
      parent[find(p)] = find(q);
    }
    const ax = position[3 * a]! - ox;
    const ay = position[3 * a + 1]! - oy;
    const az = position[3 * a + 2]! - oz;
    const ux = position[3 * b]! - ox - ax;
    const uy = position[3 * b + 1]! - oy - ay;
    const uz = position[3 * b + 2]! - oz - az;
    const vx = position[3 * c]! - ox - ax;
    const vy = position[3 * c + 1]! - oy - ay;
    const vz = position[3 * c + 2]! - oz - az;
    const nx = uy * vz - uz * vy;
    const ny = uz * vx - ux * vz;
    const nz = ux * vy - uy * vx;
    const twice = Math.sqrt(nx * nx + ny * ny + nz * nz);
    volume += (nx * ax + ny * ay + nz * az) / 6;
    area += twice / 2;
    if (patch[t] === 0) wallArea += twice / 2;
    const uu = ux * ux + uy * uy + uz * uz;
    const vv = vx * vx + vy * vy + vz * vz;
    const uv = ux * vx + uy * vy + uz * vz;
    const ww = uu + vv - 2 * uv;
    const first = Math.atan2(twice, uv);
    const second = Math.atan2(twice, uu - uv);
    smallest = Math.min(smallest, first, second, Math.PI - first - second);
    longest = Math.max(longest, uu, vv, ww);
  }
  keys.sort();
  let edges = 0;
  let openEdges = 0;
  let misorientedEdges = 0;
  for (let i = 0; i < keys.length; ) {
    const edge = Math.floor(keys[i]! / 2);
    let end = i;
    let backward = 0;
    while (end < keys.length && Math.floor(keys[end]! / 2) === edge) backward += keys[end++]! % 2;
    edges++;
    if (end - i !== 2) openEdges++;
    else if (backward !== 1) misorientedEdges++;
    i = end;
  }
  let components = 0;
  for (let v = 0; v < vertices; v++) if (parent[v] === v) components++;
  return {
    vertices,
    edges,
    triangles: faces,
    openEdges,
    misorientedEdges,
    components,
    euler: vertices - edges + faces,
    smallestAngle: smallest,
    longestEdge: Math.sqrt(longest),
    volume,
    area,
    wallArea,
  };
}

import type { LumenMesh } from '../../src/mesh/lumen.ts';

/** What a cap is like, against the vessel it closes. */
export interface CapJudgement {
  readonly name: string;
  /** Farthest corner from the plane through the centre, over the radius. */
  readonly flat: number;
  /** |area / (πr²) − 1| */
  readonly area: number;
  /** Distance of the centroid from the centre, over the radius. */
  readonly centre: number;
  /** Smallest cosine between a triangle's normal and the patch's. */
  readonly square: number;
  readonly rimEdges: number;
  /** Longest rim edge over the radius. */
  readonly rimEdge: number;
  /** Largest |cosine| between the cap's normal and that of a wall triangle on its rim: 0 for a sharp right angle. */
  readonly sharp: number;
}

/** Measures every cap of a mesh from its triangles alone. */
export function judgeCaps(mesh: LumenMesh): CapJudgement[] {
  const p = (v: number): [number, number, number] => [
    mesh.position[3 * v]!,
    mesh.position[3 * v + 1]!,
    mesh.position[3 * v + 2]!,
  ];
  const cross = (t: number): [number, number, number] => {
    const [a, b, c] = [0, 1, 2].map((k) => p(mesh.triangle[3 * t + k]!)) as unknown as [number[], number[], number[]];
    const u = a.map((x, k) => b[k]! - x);
    const v = a.map((x, k) => c[k]! - x);
    return [u[1]! * v[2]! - u[2]! * v[1]!, u[2]! * v[0]! - u[0]! * v[2]!, u[0]! * v[1]! - u[1]! * v[0]!];
  };
  const wall = new Map<string, number>();
  const lists: number[][] = mesh.patches.map(() => []);
  mesh.patch.forEach((patch, t) => {
    lists[patch]!.push(t);
    if (patch !== 0) return;
    for (let k = 0; k < 3; k++) wall.set(`${mesh.triangle[3 * t + k]},${mesh.triangle[3 * t + ((k + 1) % 3)]}`, t);
  });
  return mesh.patches.slice(1).map((patch, i) => {
    const r = patch.radius;
    let area = 0;
    let flat = 0;
    let square = 1;
    const centroid = [0, 0, 0];
    let rimEdges = 0;
    let rimEdge = 0;
    let sharp = 0;
    for (const t of lists[i + 1]!) {
      const n = cross(t);
      const size = Math.hypot(...n);
      area += size / 2;
      const cosine = n.reduce((sum, x, k) => sum + x * patch.normal[k]!, 0) / size;
      square = Math.min(square, cosine);
      for (let k = 0; k < 3; k++) {
        const a = mesh.triangle[3 * t + k]!;
        const b = mesh.triangle[3 * t + ((k + 1) % 3)]!;
        const q = p(a);
        flat = Math.max(
          flat,
          Math.abs(q.reduce((sum, x, m) => sum + (x - patch.centre[m]!) * patch.normal[m]!, 0)) / r,
        );
        for (let m = 0; m < 3; m++) centroid[m]! += (q[m]! * size) / 6;
        const beyond = wall.get(`${b},${a}`);
        if (beyond === undefined) continue;
        rimEdges++;
        rimEdge = Math.max(rimEdge, Math.hypot(...p(b).map((x, m) => x - q[m]!)) / r);
        const w = cross(beyond);
        sharp = Math.max(sharp, Math.abs(w.reduce((sum, x, m) => sum + x * patch.normal[m]!, 0)) / Math.hypot(...w));
      }
    }
    return {
      name: patch.name,
      flat,
      area: Math.abs(area / (Math.PI * r * r) - 1),
      centre: Math.hypot(...centroid.map((x, m) => x / area - patch.centre[m]!)) / r,
      square,
      rimEdges,
      rimEdge,
      sharp,
    };
  });
}

import type { LumenVolume } from '../../src/volume/lumen-volume.ts';

/** What a volume mesh is like, found the plain way. */
export interface VolumeJudgement {
  /** m³, of all cells cut in tetrahedra from their middles. */
  readonly volume: number;
  /** Least volume of those tetrahedra over the cube of the cell's longest edge. */
  readonly flattest: number;
  /** Faces that neither two cells nor one cell and one outer face have. */
  readonly unmatched: number;
  /** Points that no cell has. */
  readonly unused: number;
}

const KINDS = [
  { key: 'tetrahedron', size: 4, faces: ['021', '013', '123', '203'] },
  { key: 'pyramid', size: 5, faces: ['0321', '014', '124', '234', '304'] },
  { key: 'prism', size: 6, faces: ['021', '345', '0143', '1254', '2035'] },
] as const;

export function judgeVolumeMesh(mesh: LumenVolume): VolumeJudgement {
  const p = (v: number): number[] => [0, 1, 2].map((k) => mesh.position[3 * v + k]!);
  const minus = (a: number[], b: number[]): number[] => a.map((x, k) => x - b[k]!);
  const det = (a: number[], b: number[], c: number[]): number =>
    a[0]! * (b[1]! * c[2]! - b[2]! * c[1]!) +
    a[1]! * (b[2]! * c[0]! - b[0]! * c[2]!) +
    a[2]! * (b[0]! * c[1]! - b[1]! * c[0]!);
  const faces = new Map<string, number>();
  const used = new Set<number>();
  const see = (corners: number[]): void => {
    const name = corners.toSorted((a, b) => a - b).join();
    faces.set(name, (faces.get(name) ?? 0) + 1);
  };
  let volume = 0;
  let flattest = Infinity;
  for (const { key, size, faces: lists } of KINDS) {
    const cells = mesh[key];
    for (let at = 0; at < cells.length; at += size) {
      const corners = [...cells.subarray(at, at + size)];
      for (const v of corners) used.add(v);
      const places = corners.map(p);
      const middle = [0, 1, 2].map((k) => places.reduce((sum, q) => sum + q[k]! / size, 0));
      let longest = 0;
      for (const q of places) for (const r of places) longest = Math.max(longest, Math.hypot(...minus(q, r)));
      for (const list of lists) {
        const face = [...list].map((c) => places[Number(c)]!);
        see([...list].map((c) => corners[Number(c)]!));
        const part = (a: number[], b: number[], c: number[]): number =>
          det(minus(a, middle), minus(b, middle), minus(c, middle)) / 6;
        const [a, b, c, d] = face as [number[], number[], number[], number[] | undefined];
        const cuts = d === undefined ? [part(a, b, c)] : [part(a, b, c), part(a, c, d), part(a, b, d), part(b, c, d)];
        for (const cut of cuts) {
          volume += d === undefined ? cut : cut / 2;
          flattest = Math.min(flattest, cut / (longest * longest * longest));
        }
      }
    }
  }
  for (let i = 0; i < mesh.triangle.length; i += 3) see([...mesh.triangle.subarray(i, i + 3)]);
  for (let i = 0; i < mesh.quad.length; i += 4) see([...mesh.quad.subarray(i, i + 4)]);
  let unmatched = 0;
  for (const count of faces.values()) if (count !== 2) unmatched++;
  return { volume, flattest, unmatched, unused: mesh.position.length / 3 - used.size };
}

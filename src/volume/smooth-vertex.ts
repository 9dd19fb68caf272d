import type { TetMesh } from './tet-mesh.ts';

/** Directions of a cube's faces and corners. */
const TRIES = ((): Float64Array => {
  const out: number[] = [];
  for (let k = 0; k < 3; k++) for (const s of [-1, 1]) out.push(k === 0 ? s : 0, k === 1 ? s : 0, k === 2 ? s : 0);
  const c = Math.sqrt(1 / 3);
  for (const x of [-c, c]) for (const y of [-c, c]) for (const z of [-c, c]) out.push(x, y, z);
  return Float64Array.from(out);
})();

/** The tetrahedra round one vertex after another. */
export class Star {
  readonly mesh: TetMesh;
  /** (4 count) corners of the tetrahedra round the vertex that was gathered last. */
  readonly list: number[] = [];
  private marked = new Int32Array(0);
  private round = 0;

  constructor(mesh: TetMesh) {
    this.mesh = mesh;
  }

  /** Lists the tetrahedra round a vertex; returns their least quality. */
  gather(v: number): number {
    const { mesh, list } = this;
    if (this.marked.length < mesh.slots) this.marked = new Int32Array(2 * mesh.slots);
    const round = ++this.round;
    list.length = 0;
    const start = mesh.home[v]!;
    if (start < 0) return Infinity;
    list.push(start);
    this.marked[start] = round;
    for (let i = 0; i < list.length; i++) {
      const t = 4 * list[i]!;
      for (let k = 0; k < 4; k++) {
        if (mesh.corner[t + k] === v) continue;
        const n = mesh.beyond[t + k]!;
        if (n < 0 || this.marked[n] === round) continue;
        this.marked[n] = round;
        list.push(n);
      }
    }
    return this.least();
  }

  /** Least quality of the listed tetrahedra. */
  least(floor = -Infinity): number {
    const { mesh, list } = this;
    let least = Infinity;
    for (const t of list) {
      const c = 4 * t;
      const q = mesh.quality(mesh.corner[c]!, mesh.corner[c + 1]!, mesh.corner[c + 2]!, mesh.corner[c + 3]!);
      if (q < least) {
        least = q;
        if (q <= floor) return q;
      }
    }
    return least;
  }
}

/**
 * Moves a vertex that all tetrahedra lie round of to where the worst of them is better: towards the mean of its
 * neighbours, then by ever shorter steps to all sides.
 */
export function smoothVertex(star: Star, v: number): void {
  const { mesh, list } = star;
  const before = star.gather(v);
  if (list.length === 0) return;
  const p = mesh.position;
  const at = 3 * v;
  let best = before;
  let [x, y, z] = [p[at]!, p[at + 1]!, p[at + 2]!];
  const attempt = (tx: number, ty: number, tz: number): boolean => {
    p[at] = tx;
    p[at + 1] = ty;
    p[at + 2] = tz;
    const value = star.least(best);
    if (value <= best + 1e-6) return false;
    best = value;
    [x, y, z] = [tx, ty, tz];
    return true;
  };
  let [cx, cy, cz, n] = [0, 0, 0, 0];
  for (const t of list) {
    for (let k = 0; k < 4; k++) {
      const w = mesh.corner[4 * t + k]!;
      if (w === v) continue;
      cx += p[3 * w]!;
      cy += p[3 * w + 1]!;
      cz += p[3 * w + 2]!;
      n++;
    }
  }
  attempt(cx / n, cy / n, cz / n);
  let step = 0.2 * mesh.size[v]!;
  for (let round = 0; round < 6; round++) {
    let moved = false;
    for (let i = 0; i < TRIES.length && !moved; i += 3)
      moved = attempt(x + step * TRIES[i]!, y + step * TRIES[i + 1]!, z + step * TRIES[i + 2]!);
    if (!moved) step *= 0.5;
  }
  p[at] = x;
  p[at + 1] = y;
  p[at + 2] = z;
  if (best > before) for (const t of list) mesh.setBall(t);
}

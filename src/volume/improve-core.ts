import { Star, smoothVertex } from './smooth-vertex.ts';
import { FACE, type TetMesh } from './tet-mesh.ts';

/** Quality that is left alone; about that of a tetrahedron with a least dihedral angle of 25°. */
const ENOUGH = 0.45;
/** Most tetrahedra round an edge that is taken away. */
const MOST_ROUND = 9;
const PASSES = 8;

/**
 * Betters the worst tetrahedra of a region: edges and faces are replaced by others and vertices within are moved,
 * never to a lesser least quality.
 *
 * Source: Freitag, Ollivier-Gooch (1997), doi:10.1002/(SICI)1097-0207(19971115)40:21<3979::AID-NME251>3.0.CO;2-9; the way
 * to fill the hole round an edge by Klincsek (1980), doi:10.1016/S0167-5060(08)70044-X.
 */
export class CoreImprover {
  private readonly mesh: TetMesh;
  private readonly star: Star;
  private readonly ring = new Int32Array(MOST_ROUND + 2);
  private readonly around: number[] = [];
  private readonly best = new Float64Array(64 * 64);
  private readonly cut = new Int32Array(64 * 64);

  constructor(mesh: TetMesh) {
    this.mesh = mesh;
    this.star = new Star(mesh);
  }

  /**
   * @param fixed vertices below this number stay where they are
   * @returns     least quality
   */
  improve(fixed: number): number {
    const { mesh, star } = this;
    for (let pass = 0; pass < PASSES; pass++) {
      for (let v = fixed; v < mesh.vertices; v++) if (pass < 2 || this.isPoor(v)) smoothVertex(star, v);
      let changed = 0;
      for (let t = 0; t < mesh.slots; t++) {
        if (mesh.corner[4 * t]! < 0 || this.qualityOf(t) > ENOUGH) continue;
        if (this.reconnect(t)) changed++;
      }
      if (changed === 0 && pass >= 2) break;
    }
    for (let v = fixed; v < mesh.vertices; v++) if (this.isPoor(v)) smoothVertex(star, v);
    let least = Infinity;
    for (let t = 0; t < mesh.slots; t++) if (mesh.corner[4 * t]! >= 0) least = Math.min(least, this.qualityOf(t));
    return least;
  }

  qualityOf(t: number): number {
    const { mesh } = this;
    const c = mesh.corner;
    return mesh.quality(c[4 * t]!, c[4 * t + 1]!, c[4 * t + 2]!, c[4 * t + 3]!);
  }

  private isPoor(v: number): boolean {
    return this.star.gather(v) < ENOUGH;
  }

  /** Replaces an edge or a face of a tetrahedron where that betters the worst; whether it did. */
  private reconnect(t: number): boolean {
    const { corner } = this.mesh;
    for (let i = 0; i < 3; i++) {
      for (let j = i + 1; j < 4; j++) if (this.removeEdge(t, corner[4 * t + i]!, corner[4 * t + j]!)) return true;
    }
    for (let k = 0; k < 4; k++) if (this.removeFace(t, k)) return true;
    return false;
  }

  /** Two tetrahedra that share a face become three that share an edge. */
  private removeFace(t: number, k: number): boolean {
    const { mesh } = this;
    const n = mesh.beyond[4 * t + k]!;
    if (n < 0) return false;
    const apex = mesh.corner[4 * t + k]!;
    let far = 0;
    while (mesh.beyond[4 * n + far] !== t) far++;
    const other = mesh.corner[4 * n + far]!;
    const before = Math.min(this.qualityOf(t), this.qualityOf(n));
    for (let i = 0; i < 3; i++) {
      const a = mesh.corner[4 * t + FACE[3 * k + i]!]!;
      const b = mesh.corner[4 * t + FACE[3 * k + ((i + 1) % 3)]!]!;
      if (mesh.quality(apex, a, b, other) <= 1.0001 * before + 1e-6) {
        mesh.freshCount = 0;
        return false;
      }
      mesh.plan(apex, a, b, other);
    }
    mesh.replace([t, n], 2);
    return true;
  }

  /** The tetrahedra round an edge become pairs over the triangles that fill the ring of their other corners. */
  private removeEdge(t: number, a: number, b: number): boolean {
    const { mesh, around } = this;
    const count = this.walkRound(t, a, b);
    if (count < 3) return false;
    let before = Infinity;
    for (const one of around) before = Math.min(before, this.qualityOf(one));
    const value = this.fillRing(count, a, b);
    if (value <= 1.0001 * before + 1e-6) return false;
    this.planRing(0, count - 1, a, b);
    mesh.replace(around, around.length);
    return true;
  }

  /** Lists the tetrahedra round an edge and the ring, counter-clockwise seen from b; 0 where it lies on the boundary or has too many. */
  private walkRound(start: number, a: number, b: number): number {
    const { mesh, ring, around } = this;
    around.length = 0;
    let t = start;
    // The other two corners p, q such that a, b, p, q is a positive tetrahedron.
    let p = -1;
    let q = -1;
    for (let k = 0; k < 4; k++) {
      const c = mesh.corner[4 * t + k]!;
      if (c === a || c === b) continue;
      if (p < 0) p = c;
      else q = c;
    }
    if (mesh.six(a, b, p, q) < 0) [p, q] = [q, p];
    const first = p;
    for (let count = 0; count < MOST_ROUND; ) {
      ring[count++] = p;
      around.push(t);
      // On across the face a, b, q.
      const n = mesh.beyond[4 * t + mesh.indexIn(t, p)]!;
      if (n < 0) return 0;
      if (q === first) return n === start ? count : 0;
      let next = -1;
      for (let k = 0; k < 4; k++) {
        const c = mesh.corner[4 * n + k]!;
        if (c !== a && c !== b && c !== q) next = c;
      }
      p = q;
      q = next;
      t = n;
    }
    return 0;
  }

  /** Best least quality of all fillings of the ring's polygon, by what its parts allow. */
  private fillRing(count: number, a: number, b: number): number {
    const { mesh, ring, best, cut } = this;
    for (let span = 2; span < count; span++) {
      for (let i = 0; i + span < count; i++) {
        const k = i + span;
        let most = -Infinity;
        let by = i + 1;
        for (let j = i + 1; j < k; j++) {
          const [p, q, r] = [ring[i]!, ring[j]!, ring[k]!];
          let least = Math.min(mesh.quality(p, q, r, b), mesh.quality(p, r, q, a));
          if (j > i + 1) least = Math.min(least, best[64 * i + j]!);
          if (k > j + 1) least = Math.min(least, best[64 * j + k]!);
          if (least <= most) continue;
          most = least;
          by = j;
        }
        best[64 * i + k] = most;
        cut[64 * i + k] = by;
      }
    }
    return best[count - 1]!;
  }

  private planRing(i: number, k: number, a: number, b: number): void {
    if (k < i + 2) return;
    const { mesh, ring, cut } = this;
    const j = cut[64 * i + k]!;
    mesh.plan(ring[i]!, ring[j]!, ring[k]!, b);
    mesh.plan(ring[i]!, ring[k]!, ring[j]!, a);
    this.planRing(i, j, a, b);
    this.planRing(j, k, a, b);
  }
}

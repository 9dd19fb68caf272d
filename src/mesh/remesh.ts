import type { JunctionShape } from './junction-shape.ts';
import { FREE, type PatchMesh, RIM } from './patch-mesh.ts';
import { LONG, ScoredPatch } from './scored-patch.ts';

/** Longest edge allowed while the patch is coarse, at each attempt. */
const COARSE = [1.4, 1.15, 1.3, 1.22];
/** Shortest edge wanted. */
const SHORT = 0.62;
/** Move too small to be worth it, in edge lengths wanted. */
const STILL = 0.1;
/** Least edge length wanted at a rim over that of its tube: a rim's edges stay as they are, however near a thin tube is. */
export const RIM_SIZE = 0.7;
/** sin² of the smallest angle that smoothing must keep: 35°. */
const GOOD = 0.33;
/** sin² of the smallest angle below which a triangle is worked on at the end: 28°. */
const POOR = 0.22;

/**
 * Turns a coarse closed triangulation of a node's wall into one of even, well-shaped triangles: edges are split,
 * collapsed and flipped and vertices moved along the wall until edge lengths are near those wanted and the smallest
 * angles are as large as can be had. Rims stay.
 *
 * Source: the split–collapse–flip–smooth cycle is common practice, no source.
 */
export class Remesher {
  private readonly patch: ScoredPatch;
  private readonly mesh: PatchMesh;
  private readonly shape: JunctionShape;
  private looked = -1;
  private most = 0;
  private coarse = 0;

  constructor(mesh: PatchMesh, shape: JunctionShape) {
    this.mesh = mesh;
    this.shape = shape;
    this.patch = new ScoredPatch(mesh, shape);
  }

  /**
   * Works a coarse triangulation up to the edge lengths wanted.
   *
   * @param most    vertices; splitting stops there, which happens only where the rims run into each other
   * @param attempt varies the edge length of the coarse stage
   */
  start(most: number, attempt: number): void {
    this.most = most;
    this.coarse = COARSE[attempt % COARSE.length]!;
    const { mesh } = this;
    this.patch.star = true;
    this.patch.thin = Math.min(...this.shape.radius.subarray(0, this.shape.count));
    for (let t = 0; t < mesh.triangles; t++) this.patch.rescore(t);
    for (let pass = 0; pass < 16; pass++) {
      const splits = this.splitLong();
      this.flipAll();
      if (splits === 0) this.smoothAll();
      if (splits === 0) break;
    }
    this.patch.star = false;
    for (let t = 0; t < mesh.triangles; t++) this.patch.rescore(t);
    for (let pass = 0; pass < 2; pass++) this.cycle();
  }

  /**
   * Brings the mesh to a shape, or rims, that have changed a little.
   *
   * @param around corners of a rim; rims and their apexes come first among the vertices
   */
  follow(around: number): void {
    const { mesh, shape } = this;
    const p = mesh.position;
    for (let v = 0; v < mesh.vertices; v++) {
      if (mesh.kind[v] !== FREE && mesh.kind[v] !== RIM) continue;
      shape.lookAt(p[3 * v]!, p[3 * v + 1]!, p[3 * v + 2]!);
      if (mesh.kind[v] === FREE) {
        shape.project();
        this.patch.put(v);
      }
      const size = shape.edgeHere();
      mesh.size[v] =
        mesh.kind[v] === FREE ? size : Math.max(size, RIM_SIZE * shape.edge[Math.floor(v / (around + 1))]!);
    }
    for (let t = 0; t < mesh.triangles; t++) this.patch.rescore(t);
    this.flipAll();
    this.smoothAll();
    this.cycle();
  }

  /**
   * Ends the work; returns the worst score of the patch.
   *
   * @param around corners of a rim; rims and their apexes come first among the vertices
   */
  finish(around: number): number {
    const { mesh } = this;
    this.flipAll();
    for (let pass = 0; pass < 3 && this.splitLong() > 0; pass++) this.flipAll();
    if (this.countPoor() < 50 + 0.1 * mesh.living) {
      for (let pass = 0; pass < 8; pass++) if (this.mendPoor() === 0) break;
    }
    this.splitChords(around);
    let worst = 1;
    for (let t = 0; t < mesh.triangles; t++) {
      if (mesh.from[3 * t]! >= 0 && mesh.cap[t] === 0 && mesh.score[t]! < worst) worst = mesh.score[t]!;
    }
    return worst;
  }

  /**
   * Splits edges that join two corners of one rim across the wall. In a good patch there are none; in a bad one the
   * patch beyond the rim might have the same, and the surface would have an edge of four triangles.
   */
  private splitChords(around: number): void {
    const { mesh } = this;
    const end = 3 * mesh.triangles;
    for (let h = 0; h < end; h++) {
      const a = mesh.from[h]!;
      if (a < 0 || mesh.kind[a] !== RIM || mesh.twin[h]! < h || mesh.locked(h)) continue;
      const b = mesh.from[mesh.twin[h]!]!;
      if (mesh.kind[b] === RIM && Math.floor(a / (around + 1)) === Math.floor(b / (around + 1))) this.splitAt(h);
    }
  }

  private cycle(): void {
    this.unfold();
    this.collapseShort();
    this.splitLong();
    this.flipAll();
    this.smoothAll();
    this.flipAll();
    this.smoothAll();
  }

  private splitLong(): number {
    const { mesh } = this;
    let splits = 0;
    const long = this.patch.star ? this.coarse : LONG;
    const end = 3 * mesh.triangles;
    for (let h = 0; h < end && mesh.living < 2 * this.most && mesh.vertices < 6 * this.most; h++) {
      const a = mesh.from[h]!;
      if (a < 0) continue;
      const t = mesh.twin[h]!;
      if (t < h || mesh.locked(h)) continue;
      const b = mesh.from[t]!;
      const size = 0.5 * (mesh.size[a]! + mesh.size[b]!);
      const square = mesh.squaredLength(a, b);
      if (square < long * long * size * size) continue;
      this.splitAt(h);
      splits++;
    }
    return splits;
  }

  private splitAt(h: number): void {
    const { mesh, shape } = this;
    this.patch.project(mesh.from[h]!, mesh.from[mesh.twin[h]!]!);
    const m = mesh.addVertex(shape.x, shape.y, shape.z, shape.edgeHere(), FREE);
    mesh.split(h, m);
    this.patch.rescoreStar(m);
  }

  /** Flips edges until none gains, looking only where a triangle has changed since it was last looked at. */
  private flipAll(): void {
    const { mesh } = this;
    for (let sweep = 0; sweep < 8; sweep++) {
      const since = this.looked;
      this.looked = ++this.patch.clock;
      let flips = 0;
      const end = mesh.triangles;
      for (let s = 0; s < end; s++) {
        if (mesh.from[3 * s]! < 0 || mesh.cap[s] === 1) continue;
        const fresh = mesh.changed[s]! >= since;
        for (let h = 3 * s; h < 3 * s + 3; h++) {
          const t = mesh.twin[h]!;
          const u = (t / 3) | 0;
          if (t < h || mesh.cap[u] === 1) continue;
          if (!fresh && mesh.changed[u]! < since) continue;
          if (this.patch.tryFlip(h, t)) flips++;
        }
      }
      if (flips === 0) break;
    }
  }

  private collapseShort(): void {
    const { mesh } = this;
    for (let h = 0; h < 3 * mesh.triangles; h++) {
      const a = mesh.from[h]!;
      if (a < 0 || mesh.kind[a] !== FREE) continue;
      const b = mesh.from[mesh.twin[h]!]!;
      const size = Math.min(mesh.size[a]!, mesh.size[b]!);
      if (mesh.squaredLength(a, b) > SHORT * SHORT * size * size) continue;
      this.patch.tryCollapse(h, 0.1);
    }
  }

  /**
   * Draws vertices of folded triangles into neighbours where that leaves less folded, whatever the angles.
   *
   * A small fold can be stuck for all other steps: each asks that no single triangle gets worse.
   */
  private unfold(): void {
    const { mesh } = this;
    for (let t = 0; t < mesh.triangles; t++) {
      for (let k = 0; k < 3; k++) {
        const v = mesh.from[3 * t + k]!;
        if (v < 0 || mesh.score[t]! >= 0) break;
        if (mesh.kind[v] === FREE) this.patch.unfoldAt(3 * t + k);
      }
    }
  }

  private smoothAll(): void {
    const { mesh } = this;
    for (let v = 0; v < mesh.vertices; v++) if (mesh.kind[v] === FREE) this.smooth(v);
  }

  /** Moves a vertex to the middle of its neighbours, on the wall, unless that spoils a triangle. */
  private smooth(v: number): boolean {
    const { mesh } = this;
    const p = mesh.position;
    const start = mesh.leaving[v]!;
    let h = start;
    let worst = 1;
    let sx = 0;
    let sy = 0;
    let sz = 0;
    let sum = 0;
    do {
      const n = mesh.from[mesh.next(h)]!;
      sx += p[3 * n]!;
      sy += p[3 * n + 1]!;
      sz += p[3 * n + 2]!;
      sum++;
      const score = mesh.score[(h / 3) | 0]!;
      if (score < worst) worst = score;
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
    const x = p[3 * v]!;
    const y = p[3 * v + 1]!;
    const z = p[3 * v + 2]!;
    const dx = sx / sum - x;
    const dy = sy / sum - y;
    const dz = sz / sum - z;
    const least = STILL * mesh.size[v]!;
    if (worst > POOR && dx * dx + dy * dy + dz * dz < least * least) return false;
    this.shape.x = x + 0.9 * dx;
    this.shape.y = y + 0.9 * dy;
    this.shape.z = z + 0.9 * dz;
    this.patch.limit = Math.min(worst, GOOD);
    return this.patch.move(v);
  }

  /** Triangles of small angle. A sound patch has a few; where a tenth are, nothing helps. */
  private countPoor(): number {
    const { mesh } = this;
    let poor = 0;
    for (let t = 0; t < mesh.triangles; t++)
      if (mesh.from[3 * t]! >= 0 && mesh.cap[t] === 0 && mesh.score[t]! < POOR) poor++;
    return poor;
  }

  /** Works on the triangles of small angle: flips, collapses, then small moves that raise the worst angle of a star. */
  private mendPoor(): number {
    const { mesh } = this;
    let poor = 0;
    for (let t = 0; t < mesh.triangles; t++) {
      if (mesh.from[3 * t]! < 0 || mesh.cap[t] === 1 || mesh.score[t]! >= POOR) continue;
      poor++;
      if (this.flipAround(t)) continue;
      if (this.collapseShortest(t)) continue;
      for (let h = 3 * t; h < 3 * t + 3; h++) {
        const v = mesh.from[h]!;
        if (v >= 0 && mesh.kind[v] === FREE) this.raise(v);
        // The neighbours of a triangle on a rim may have to make room.
        const w = mesh.from[mesh.previous(mesh.twin[h]!)]!;
        if (mesh.kind[w] === FREE) this.smooth(w);
      }
    }
    return poor;
  }

  private flipAround(t: number): boolean {
    const { mesh } = this;
    for (let h = 3 * t; h < 3 * t + 3; h++) {
      if (!mesh.locked(h) && this.patch.tryFlip(h, mesh.twin[h]!)) return true;
    }
    return false;
  }

  private collapseShortest(t: number): boolean {
    const { mesh } = this;
    let shortest = Infinity;
    let edge = -1;
    for (let h = 3 * t; h < 3 * t + 3; h++) {
      const square = mesh.squaredLength(mesh.from[h]!, mesh.from[mesh.twin[h]!]!);
      if (square < shortest) {
        shortest = square;
        edge = h;
      }
    }
    const floor = mesh.score[t]! + 1e-3;
    if (mesh.kind[mesh.from[edge]!] === FREE && this.patch.tryCollapse(edge, floor)) return true;
    const twin = mesh.twin[edge]!;
    return mesh.kind[mesh.from[twin]!] === FREE && this.patch.tryCollapse(twin, floor);
  }

  /** Pattern search for the place of a vertex that makes the worst triangle of its star best. */
  private raise(v: number): void {
    const { mesh, shape } = this;
    let step = 0.3 * mesh.size[v]!;
    for (let round = 0; round < 6; round++) {
      const worst = this.patch.worstAround(mesh.leaving[v]!);
      if (worst > GOOD) return;
      const x = mesh.position[3 * v]!;
      const y = mesh.position[3 * v + 1]!;
      const z = mesh.position[3 * v + 2]!;
      shape.lookAt(x, y, z);
      shape.evaluate();
      const size = Math.sqrt(shape.gx * shape.gx + shape.gy * shape.gy + shape.gz * shape.gz);
      const nx = shape.gx / size;
      const ny = shape.gy / size;
      const nz = shape.gz / size;
      // Any tangent, and the one square to it.
      let ax = Math.abs(nx) < 0.6 ? 1 : 0;
      let ay = ax === 1 ? 0 : 1;
      let az = 0;
      const dot = ax * nx + ay * ny;
      ax -= dot * nx;
      ay -= dot * ny;
      az -= dot * nz;
      const scale = step / Math.sqrt(ax * ax + ay * ay + az * az);
      ax *= scale;
      ay *= scale;
      az *= scale;
      const bx = ny * az - nz * ay;
      const by = nz * ax - nx * az;
      const bz = nx * ay - ny * ax;
      let moved = false;
      for (let k = 0; k < 8 && !moved; k++) {
        const c = Math.cos((k * Math.PI) / 4);
        const s = Math.sin((k * Math.PI) / 4);
        shape.lookAt(x + c * ax + s * bx, y + c * ay + s * by, z + c * az + s * bz);
        this.patch.limit = worst + 1e-4;
        moved = this.patch.move(v);
      }
      if (!moved) step *= 0.5;
    }
  }
}

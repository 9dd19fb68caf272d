import type { JunctionShape } from './junction-shape.ts';
import { FREE, type PatchMesh, RIM } from './patch-mesh.ts';

/** Longest edge allowed, in edge lengths wanted. */
const LONG = 1.3;
/** Longest edge allowed while the patch is coarse, at each attempt. */
const COARSE = [1.4, 1.15, 1.3, 1.22];
/** Shortest edge wanted. */
const SHORT = 0.62;
/** Move too small to be worth it, in edge lengths wanted. */
const STILL = 0.1;
/** Least distance of a triangle's plane from the node, in radii of the thinnest tube, while the patch is coarse. */
const STAR = 0.2;
/** Least edge length wanted at a rim over that of its tube: a rim's edges stay as they are, however near a thin tube is. */
export const RIM_SIZE = 0.7;
/** sin² of the smallest angle that smoothing must keep: 35°. */
const GOOD = 0.33;
/** sin² of the smallest angle from which on a flip is not looked for: 42°. */
const FINE = 0.45;
/** sin² of the smallest angle below which a triangle is worked on at the end: 28°. */
const POOR = 0.22;

/**
 * Turns a coarse closed triangulation of a node's wall into one of even, well-shaped triangles: edges are split,
 * collapsed and flipped and vertices moved along the wall until edge lengths are near those wanted and the smallest
 * angles are as large as can be had. Rims stay.
 *
 * Every step is judged by the score of the triangles it touches: sin² of the smallest angle, or, where a triangle does
 * not face out of the wall, a negative number. Once a patch has no negative score it never gets one again.
 *
 * Source: the split–collapse–flip–smooth cycle is common practice, no source.
 */
export class Remesher {
  private readonly mesh: PatchMesh;
  private readonly shape: JunctionShape;
  private mark = new Int32Array(1024);
  private round = 0;
  private clock = 0;
  private looked = -1;
  private most = 0;
  /** Score that `rate` looks for, and the one it found; fields for the reason given at JunctionShape.x. */
  private limit = 0;
  private rated = 0;
  private longest = 0;
  /** Scores of a star while it is tried; no vertex has as many neighbours as all rims have corners. */
  private scores = new Float64Array(256 * 16);
  private coarse = 0;
  private star = true;
  private thin = 1;

  constructor(mesh: PatchMesh, shape: JunctionShape) {
    this.mesh = mesh;
    this.shape = shape;
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
    this.star = true;
    this.thin = Math.min(...this.shape.radius.subarray(0, this.shape.count));
    for (let t = 0; t < mesh.triangles; t++) this.rescore(t);
    for (let pass = 0; pass < 16; pass++) {
      const splits = this.splitLong();
      this.flipAll();
      if (splits === 0) this.smoothAll();
      if (splits === 0) break;
    }
    this.star = false;
    for (let t = 0; t < mesh.triangles; t++) this.rescore(t);
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
        this.put(v);
      }
      const size = shape.edgeHere();
      mesh.size[v] =
        mesh.kind[v] === FREE ? size : Math.max(size, RIM_SIZE * shape.edge[Math.floor(v / (around + 1))]!);
    }
    for (let t = 0; t < mesh.triangles; t++) this.rescore(t);
    this.flipAll();
    this.smoothAll();
    this.cycle();
  }

  /** Ends the work; returns the worst score of the patch. */
  finish(): number {
    const { mesh } = this;
    this.flipAll();
    for (let pass = 0; pass < 3 && this.splitLong() > 0; pass++) this.flipAll();
    for (let pass = 0; pass < 8; pass++) if (this.mendPoor() === 0) break;
    let worst = 1;
    for (let t = 0; t < mesh.triangles; t++) {
      if (mesh.from[3 * t]! >= 0 && mesh.cap[t] === 0 && mesh.score[t]! < worst) worst = mesh.score[t]!;
    }
    return worst;
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
    const { mesh, shape } = this;
    let splits = 0;
    const long = this.star ? this.coarse : LONG;
    const end = 3 * mesh.triangles;
    for (let h = 0; h < end && mesh.vertices < this.most; h++) {
      const a = mesh.from[h]!;
      if (a < 0) continue;
      const t = mesh.twin[h]!;
      if (t < h || mesh.locked(h)) continue;
      const b = mesh.from[t]!;
      const size = 0.5 * (mesh.size[a]! + mesh.size[b]!);
      const square = mesh.squaredLength(a, b);
      if (square < long * long * size * size) continue;
      this.project(a, b, this.star);
      const m = mesh.addVertex(shape.x, shape.y, shape.z, shape.edgeHere(), FREE);
      mesh.split(h, m);
      this.rescoreStar(m);
      splits++;
    }
    return splits;
  }

  /** Puts the shape's point on the wall between two vertices. */
  private project(a: number, b: number, coarse: boolean): void {
    const { shape } = this;
    const p = this.mesh.position;
    shape.x = 0.5 * (p[3 * a]! + p[3 * b]!);
    shape.y = 0.5 * (p[3 * a + 1]! + p[3 * b + 1]!);
    shape.z = 0.5 * (p[3 * a + 2]! + p[3 * b + 2]!);
    // Far from the wall the gradient may lead anywhere; the ray from the node keeps the patch a star.
    if (coarse) shape.shoot();
    else shape.project();
  }

  /** Flips edges until none gains, looking only where a triangle has changed since it was last looked at. */
  private flipAll(): void {
    const { mesh } = this;
    for (let sweep = 0; sweep < 8; sweep++) {
      const since = this.looked;
      this.looked = ++this.clock;
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
          if (this.tryFlip(h, t)) flips++;
        }
      }
      if (flips === 0) break;
    }
  }

  private setScore(t: number, score: number): void {
    this.mesh.score[t] = score;
    this.mesh.changed[t] = this.clock;
  }

  private tryFlip(h: number, t: number): boolean {
    const { mesh } = this;
    const s = (h / 3) | 0;
    const u = (t / 3) | 0;
    const before = Math.min(mesh.score[s]!, mesh.score[u]!);
    if (before > FINE) return false;
    const a = mesh.from[h]!;
    const b = mesh.from[t]!;
    const c = mesh.from[mesh.previous(h)]!;
    const d = mesh.from[mesh.previous(t)]!;
    this.limit = before + 1e-9;
    if (!this.rate(a, d, c)) return false;
    const first = this.rated;
    if (!this.rate(b, c, d)) return false;
    const second = this.rated;
    if (mesh.adjacent(c, d)) return false;
    mesh.flip(h);
    this.setScore(s, first);
    this.setScore(u, second);
    return true;
  }

  private collapseShort(): void {
    const { mesh } = this;
    for (let h = 0; h < 3 * mesh.triangles; h++) {
      const a = mesh.from[h]!;
      if (a < 0 || mesh.kind[a] !== FREE) continue;
      const b = mesh.from[mesh.twin[h]!]!;
      const size = Math.min(mesh.size[a]!, mesh.size[b]!);
      if (mesh.squaredLength(a, b) > SHORT * SHORT * size * size) continue;
      this.tryCollapse(h, 0.1, 1);
    }
  }

  /** Draws the start of h into its end if no triangle gets worse than `floor` (or than it was) and no edge too long. */
  private tryCollapse(h: number, floor: number, stretch: number): boolean {
    const { mesh, shape } = this;
    const t = mesh.twin[h]!;
    const a = mesh.from[h]!;
    const b = mesh.from[t]!;
    if (this.linked(h) !== 2) return false;
    const moves = mesh.kind[b] === FREE;
    let worst = this.worstAround(h);
    if (moves) worst = Math.min(worst, this.worstAround(t));
    // Both ends go to the new place, are looked at there, and go back if it does not do.
    const p = mesh.position;
    const [ax, ay, az] = [p[3 * a]!, p[3 * a + 1]!, p[3 * a + 2]!];
    const [bx, by, bz] = [p[3 * b]!, p[3 * b + 1]!, p[3 * b + 2]!];
    if (moves) {
      this.project(a, b, false);
      this.put(b);
    } else {
      shape.x = bx;
      shape.y = by;
      shape.z = bz;
    }
    this.put(a);
    const size = moves ? shape.edgeHere() : 0;
    this.limit = Math.min(worst, floor);
    this.longest = stretch * LONG * mesh.size[a]!;
    if (!this.starFits(h, b) || (moves && !this.starFits(t, a))) {
      p[3 * a] = ax;
      p[3 * a + 1] = ay;
      p[3 * a + 2] = az;
      p[3 * b] = bx;
      p[3 * b + 1] = by;
      p[3 * b + 2] = bz;
      return false;
    }
    if (moves) mesh.size[b] = size;
    mesh.collapse(h);
    this.rescoreStar(b);
    return true;
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
        if (mesh.kind[v] === FREE) this.unfoldAt(3 * t + k);
      }
    }
  }

  /** Tries the neighbours of the start of a half-edge in turn. */
  private unfoldAt(start: number): boolean {
    const { mesh } = this;
    let before = 0;
    let h = start;
    do {
      before += Math.min(0, mesh.score[(h / 3) | 0]!);
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
    this.limit = 0;
    do {
      const to = mesh.from[mesh.next(h)]!;
      if (this.linked(h) === 2) {
        let after = 0;
        let e = h;
        do {
          const p = mesh.from[mesh.next(e)]!;
          const q = mesh.from[mesh.previous(e)]!;
          if (p !== to && q !== to) {
            this.rate(to, p, q);
            after += Math.min(0, this.rated);
          }
          e = mesh.twin[mesh.previous(e)]!;
        } while (e !== h);
        if (after > before + 1e-9) {
          mesh.collapse(h);
          this.rescoreStar(to);
          return true;
        }
      }
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
    return false;
  }

  /** Neighbours that the two ends of a half-edge have in common. */
  private linked(h: number): number {
    const { mesh } = this;
    if (mesh.vertices > this.mark.length) this.mark = new Int32Array(2 * mesh.vertices);
    const round = ++this.round;
    let g = h;
    do {
      this.mark[mesh.from[mesh.next(g)]!] = round;
      g = mesh.twin[mesh.previous(g)]!;
    } while (g !== h);
    const t = mesh.twin[h]!;
    let common = 0;
    g = t;
    do {
      if (this.mark[mesh.from[mesh.next(g)]!] === round) common++;
      g = mesh.twin[mesh.previous(g)]!;
    } while (g !== t);
    return common;
  }

  /** Worst score in the star of the start of a half-edge. */
  private worstAround(start: number): number {
    const { mesh } = this;
    let worst = 1;
    let h = start;
    do {
      const score = mesh.score[(h / 3) | 0]!;
      if (score < worst) worst = score;
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
    return worst;
  }

  /** Whether the star of the start of a half-edge does, its triangles with `other` apart. */
  private starFits(start: number, other: number): boolean {
    const { mesh } = this;
    const v = mesh.from[start]!;
    const square = this.longest * this.longest;
    let e = start;
    do {
      const p = mesh.from[mesh.next(e)]!;
      const q = mesh.from[mesh.previous(e)]!;
      if (p !== other && q !== other) {
        if (mesh.squaredLength(v, p) > square) return false;
        if (!this.rate(v, p, q)) return false;
      }
      e = mesh.twin[mesh.previous(e)]!;
    } while (e !== start);
    return true;
  }

  /** Puts a vertex where the shape's point is. */
  private put(v: number): void {
    const p = this.mesh.position;
    p[3 * v] = this.shape.x;
    p[3 * v + 1] = this.shape.y;
    p[3 * v + 2] = this.shape.z;
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
    this.limit = Math.min(worst, GOOD);
    return this.move(v);
  }

  /** Moves a vertex to the shape's point brought to the wall, if all its triangles then score more than the limit. */
  private move(v: number): boolean {
    const { mesh, shape, scores } = this;
    shape.project();
    const size = shape.edgeHere();
    const p = mesh.position;
    const x = p[3 * v]!;
    const y = p[3 * v + 1]!;
    const z = p[3 * v + 2]!;
    this.put(v);
    const start = mesh.leaving[v]!;
    let h = start;
    let at = 0;
    do {
      const n = mesh.from[mesh.next(h)]!;
      const long = LONG * (size + mesh.size[n]!);
      if (
        (!this.star && this.limit > 0 && 4 * mesh.squaredLength(v, n) > long * long) ||
        !this.rate(v, n, mesh.from[mesh.previous(h)]!)
      ) {
        p[3 * v] = x;
        p[3 * v + 1] = y;
        p[3 * v + 2] = z;
        return false;
      }
      scores[at++] = this.rated;
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
    mesh.size[v] = size;
    at = 0;
    do {
      this.setScore((h / 3) | 0, scores[at++]!);
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
    return true;
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
      if (!mesh.locked(h) && this.tryFlip(h, mesh.twin[h]!)) return true;
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
    if (mesh.kind[mesh.from[edge]!] === FREE && this.tryCollapse(edge, floor, 1)) return true;
    const twin = mesh.twin[edge]!;
    return mesh.kind[mesh.from[twin]!] === FREE && this.tryCollapse(twin, floor, 1);
  }

  /** Pattern search for the place of a vertex that makes the worst triangle of its star best. */
  private raise(v: number): void {
    const { mesh, shape } = this;
    let step = 0.3 * mesh.size[v]!;
    for (let round = 0; round < 6; round++) {
      const worst = this.worstAround(mesh.leaving[v]!);
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
        this.limit = worst + 1e-4;
        moved = this.move(v);
      }
      if (!moved) step *= 0.5;
    }
  }

  private rescore(t: number): void {
    const { mesh } = this;
    if (mesh.from[3 * t]! < 0) return;
    if (mesh.cap[t] === 1) this.setScore(t, 1);
    else {
      this.limit = -3;
      this.rate(mesh.from[3 * t]!, mesh.from[3 * t + 1]!, mesh.from[3 * t + 2]!);
      this.setScore(t, this.rated);
    }
  }

  private rescoreStar(v: number): void {
    const { mesh } = this;
    const start = mesh.leaving[v]!;
    let h = start;
    do {
      this.rescore((h / 3) | 0);
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
  }

  /** Scores the triangle of three vertices into `rated`; whether that is above `limit`. */
  private rate(a: number, b: number, c: number): boolean {
    const { shape } = this;
    const p = this.mesh.position;
    const x = p[3 * a]!;
    const y = p[3 * a + 1]!;
    const z = p[3 * a + 2]!;
    const ux = p[3 * b]! - x;
    const uy = p[3 * b + 1]! - y;
    const uz = p[3 * b + 2]! - z;
    const vx = p[3 * c]! - x;
    const vy = p[3 * c + 1]! - y;
    const vz = p[3 * c + 2]! - z;
    const nx = uy * vz - uz * vy;
    const ny = uz * vx - ux * vz;
    const nz = ux * vy - uy * vx;
    const nn = nx * nx + ny * ny + nz * nz;
    const uu = ux * ux + uy * uy + uz * uz;
    const vv = vx * vx + vy * vy + vz * vz;
    const ex = vx - ux;
    const ey = vy - uy;
    const ez = vz - uz;
    const ww = ex * ex + ey * ey + ez * ez;
    const least = uu < vv ? (uu < ww ? uu : ww) : vv < ww ? vv : ww;
    if (!(nn > 0)) {
      this.rated = -2;
      return false;
    }
    const quality = (nn * least) / (uu * vv * ww);
    this.rated = quality;
    if (quality <= this.limit) return false;
    let depth: number;
    if (this.star) depth = (nx * x + ny * y + nz * z) / (Math.sqrt(nn) * this.thin);
    else {
      // A point inside that sees the wall here: on the nearest tube's axis, eight radii back towards the node.
      shape.x = x + (ux + vx) / 3;
      shape.y = y + (uy + vy) / 3;
      shape.z = z + (uz + vz) / 3;
      const tube = shape.nearest();
      const r = shape.radius[tube]!;
      const s = Math.max(0, shape.along - 8 * r);
      const wx = x - s * shape.axis[3 * tube]!;
      const wy = y - s * shape.axis[3 * tube + 1]!;
      const wz = z - s * shape.axis[3 * tube + 2]!;
      depth = (nx * wx + ny * wy + nz * wz) / (Math.sqrt(nn) * r);
    }
    if (depth > STAR) return true;
    this.rated = depth - 1 - STAR;
    return this.rated > this.limit;
  }
}

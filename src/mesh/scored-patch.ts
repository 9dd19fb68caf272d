import type { JunctionShape } from './junction-shape.ts';
import { FREE, type PatchMesh } from './patch-mesh.ts';

/** Longest edge allowed, in edge lengths wanted. */
export const LONG = 1.3;
/** Least distance of a triangle's plane from the point that sees it, in radii: of the thinnest tube while coarse. */
const STAR = 0.2;
/** sin² of the smallest angle from which on a flip is not looked for: 42°. */
const FINE = 0.45;

/**
 * A node's mesh with a score for every triangle, and the steps that change it, each taken only if it does no harm.
 *
 * The score is sin² of the smallest angle, or, where the triangle is not seen from inside as a wall should be, a number
 * below −1. While the patch is coarse (`star`) the inside is the node: a patch whose triangles all face away from it is
 * a star and cannot cross itself. Later it is a point on the axis of the nearest tube, for far out on a thin tube even
 * a good triangle may lean away from the node.
 */
export class ScoredPatch {
  readonly mesh: PatchMesh;
  readonly shape: JunctionShape;
  star = true;
  /** Radius of the thinnest tube. */
  thin = 1;
  /** Time, as `mesh.changed` counts it. */
  clock = 0;
  /** Score that `rate` looks for, and the one it found; fields for the reason given at JunctionShape.x. */
  limit = 0;
  rated = 0;
  private longest = 0;
  /** Scores of a star while it is tried; no vertex has as many neighbours as all rims have corners. */
  private readonly scores = new Float64Array(256 * 16);
  private mark = new Int32Array(1024);
  private round = 0;

  constructor(mesh: PatchMesh, shape: JunctionShape) {
    this.mesh = mesh;
    this.shape = shape;
  }

  /** Scores the triangle of three vertices into `rated`; whether that is above `limit`. */
  rate(a: number, b: number, c: number): boolean {
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

  rescore(t: number): void {
    const { mesh } = this;
    if (mesh.from[3 * t]! < 0) return;
    if (mesh.cap[t] === 1) this.setScore(t, 1);
    else {
      this.limit = -3;
      this.rate(mesh.from[3 * t]!, mesh.from[3 * t + 1]!, mesh.from[3 * t + 2]!);
      this.setScore(t, this.rated);
    }
  }

  rescoreStar(v: number): void {
    const { mesh } = this;
    const start = mesh.leaving[v]!;
    let h = start;
    do {
      this.rescore((h / 3) | 0);
      h = mesh.twin[mesh.previous(h)]!;
    } while (h !== start);
  }

  setScore(t: number, score: number): void {
    this.mesh.score[t] = score;
    this.mesh.changed[t] = this.clock;
  }

  /** Worst score in the star of the start of a half-edge. */
  worstAround(start: number): number {
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

  /** Puts a vertex where the shape's point is. */
  put(v: number): void {
    const p = this.mesh.position;
    p[3 * v] = this.shape.x;
    p[3 * v + 1] = this.shape.y;
    p[3 * v + 2] = this.shape.z;
  }

  /** Puts the shape's point on the wall between two vertices. */
  project(a: number, b: number): void {
    const { shape } = this;
    const p = this.mesh.position;
    shape.x = 0.5 * (p[3 * a]! + p[3 * b]!);
    shape.y = 0.5 * (p[3 * a + 1]! + p[3 * b + 1]!);
    shape.z = 0.5 * (p[3 * a + 2]! + p[3 * b + 2]!);
    // Far from the wall the gradient may lead anywhere; the ray from the node keeps the patch a star.
    if (this.star) shape.shoot();
    else shape.project();
  }

  tryFlip(h: number, t: number): boolean {
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

  /** Moves a vertex to the shape's point brought to the wall, if all its triangles then score more than the limit. */
  move(v: number): boolean {
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

  /** Draws the start of h into its end if no triangle gets worse than `floor` (or than it was) and no edge too long. */
  tryCollapse(h: number, floor: number): boolean {
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
      this.project(a, b);
      this.put(b);
    } else {
      shape.x = bx;
      shape.y = by;
      shape.z = bz;
    }
    this.put(a);
    const size = moves ? shape.edgeHere() : 0;
    this.limit = Math.min(worst, floor);
    this.longest = LONG * mesh.size[a]!;
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

  /** Tries the neighbours of the start of a half-edge in turn. */
  unfoldAt(start: number): boolean {
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
}

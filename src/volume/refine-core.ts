import { FACE, type TetMesh } from './tet-mesh.ts';

/** Radius of the ball through a tetrahedron over the wanted edge above which a point is set; 0.61 for a regular one. */
const WIDE = 0.8;
/** Least distance of a new point from another and from the boundary, over the wanted edge. */
const APART = 0.62;
const ABOVE_WALL = 0.38;
const PASSES = 12;
/** Least distance of a new point from the planes of the faces it is joined to, over the wanted edge. */
const SEEN = 0.02;
/** Members of a hole, and how often one is mended. */
const LARGEST_HOLE = 400;
const TRIES = 20;
/** How much longer edges may be with each point further from the boundary. */
const GROWTH = 1.15;

/**
 * Sets points into a region of tetrahedra that starts from any filling, a fan about one point will do, until none is much
 * wider than wanted.
 *
 * A point goes to the centre of the ball through a wide tetrahedron, or to the middle of its longest edge; what has it
 * in its ball is taken out and the hole filled from the point (Bowyer 1981, doi:10.1093/comjnl/24.2.162; Watson 1981,
 * doi:10.1093/comjnl/24.2.167). The hole is kept such that the point sees all of it, and it never reaches beyond the
 * boundary, so the boundary need not be one that such tetrahedra would have by themselves.
 */
export class CoreRefiner {
  private readonly mesh: TetMesh;
  /** (t) round in which a slot was last in the hole. */
  private marked = new Int32Array(0);
  private round = 0;
  private hole: number[] = [];
  /** Members of the hole that must go, as the point lies on a face of theirs. */
  private pinned: number[] = [];
  private widest = Infinity;

  constructor(mesh: TetMesh) {
    this.mesh = mesh;
  }

  /**
   * @param mostVertices where to stop in any case
   * @param widest       longest edge wanted anywhere
   */
  refine(mostVertices: number, widest: number): void {
    const { mesh } = this;
    this.widest = widest;
    for (let pass = 0; pass < PASSES; pass++) {
      let set = 0;
      for (let t = 0; t < mesh.slots && mesh.vertices < mostVertices; t++) {
        if (mesh.corner[4 * t]! < 0) continue;
        if (this.split(t)) {
          set++;
          t--;
        }
      }
      if (set === 0) return;
    }
  }

  /** Sets a point for the sake of a tetrahedron that is too wide; whether it did. */
  private split(t: number): boolean {
    const { mesh } = this;
    const { corner, size, ball, position } = mesh;
    const a = corner[4 * t]!;
    const b = corner[4 * t + 1]!;
    const c = corner[4 * t + 2]!;
    const d = corner[4 * t + 3]!;
    const wanted = 0.25 * (size[a]! + size[b]! + size[c]! + size[d]!);
    if (ball[4 * t + 3]! > WIDE * WIDE * wanted * wanted) {
      if (this.setPoint(t, ball[4 * t]!, ball[4 * t + 1]!, ball[4 * t + 2]!)) return true;
    }
    let longest = 0;
    let p = a;
    let q = b;
    for (let i = 0; i < 3; i++) {
      for (let j = i + 1; j < 4; j++) {
        const square = mesh.squared(corner[4 * t + i]!, corner[4 * t + j]!);
        if (square <= longest) continue;
        longest = square;
        p = corner[4 * t + i]!;
        q = corner[4 * t + j]!;
      }
    }
    const here = 0.5 * (size[p]! + size[q]!);
    if (longest < 2.9 * here * here) return false;
    return this.setPoint(
      t,
      0.5 * (position[3 * p]! + position[3 * q]!),
      0.5 * (position[3 * p + 1]! + position[3 * q + 1]!),
      0.5 * (position[3 * p + 2]! + position[3 * q + 2]!),
    );
  }

  private setPoint(from: number, x: number, y: number, z: number): boolean {
    const { mesh } = this;
    const v = mesh.addVertex(x, y, z, 0);
    const t = this.locate(from, v);
    if (t < 0 || !this.sizePoint(t, v) || !this.openHole(t, v)) {
      mesh.vertices--;
      return false;
    }
    mesh.replace(this.hole, this.hole.length);
    return true;
  }

  /** Tetrahedron that holds a point, walking from another; −1 where the walk leaves the region. */
  private locate(from: number, v: number): number {
    const { mesh } = this;
    let t = from;
    for (let step = 0; step < 200; step++) {
      let next = -2;
      // The first face asked for changes, so that no walk goes in circles for long.
      for (let i = 0; i < 4; i++) {
        const k = (i + step) & 3;
        const c = 4 * t;
        const outside = mesh.six(
          mesh.corner[c + FACE[3 * k]!]!,
          mesh.corner[c + FACE[3 * k + 1]!]!,
          mesh.corner[c + FACE[3 * k + 2]!]!,
          v,
        );
        if (outside <= 0) continue;
        next = mesh.beyond[c + k]!;
        break;
      }
      if (next === -2) return t;
      if (next === -1) return -1;
      t = next;
    }
    return -1;
  }

  /** Gives a point the size of its surroundings; whether it is far enough from the corners there. */
  private sizePoint(t: number, v: number): boolean {
    const { mesh } = this;
    let weight = 0;
    let sum = 0;
    let ratio = Infinity;
    for (let k = 0; k < 4; k++) {
      const c = mesh.corner[4 * t + k]!;
      const square = mesh.squared(c, v);
      if (square === 0) return false;
      const w = 1 / Math.sqrt(square);
      weight += w;
      sum += w * mesh.size[c]!;
      ratio = Math.min(ratio, square);
    }
    const size = Math.min((GROWTH * sum) / weight, this.widest);
    mesh.size[v] = size;
    return ratio > APART * APART * size * size;
  }

  /** Finds the hole for a point and plans what fills it; whether all is far enough away. */
  private openHole(t: number, v: number): boolean {
    const { mesh } = this;
    if (this.marked.length < mesh.slots + 1) this.marked = new Int32Array(2 * mesh.slots + 64);
    const { hole, marked } = this;
    const [x, y, z] = [mesh.position[3 * v]!, mesh.position[3 * v + 1]!, mesh.position[3 * v + 2]!];
    const inside = ++this.round;
    this.pinned.length = 0;
    hole.length = 0;
    hole.push(t);
    marked[t] = inside;
    for (let i = 0; i < hole.length && hole.length < LARGEST_HOLE; i++) {
      for (let k = 0; k < 4; k++) {
        const n = mesh.beyond[4 * hole[i]! + k]!;
        if (n < 0 || marked[n] === inside) continue;
        const dx = mesh.ball[4 * n]! - x;
        const dy = mesh.ball[4 * n + 1]! - y;
        const dz = mesh.ball[4 * n + 2]! - z;
        if (dx * dx + dy * dy + dz * dz >= mesh.ball[4 * n + 3]! * (1 - 1e-9)) continue;
        marked[n] = inside;
        hole.push(n);
      }
    }
    for (let tries = 0; tries < TRIES; tries++) {
      const state = this.planHole(t, v, inside);
      if (state === 'sound') return this.keepsVertices();
      mesh.freshCount = 0;
      if (state === 'hopeless') return false;
      this.gatherHole(t, inside);
    }
    return false;
  }

  /** Plans the filling. Where the point does not see a face of the hole, it is made smaller, or larger where it must be. */
  private planHole(t: number, v: number, inside: number): 'sound' | 'again' | 'hopeless' {
    const { mesh, hole, marked, pinned } = this;
    const size = mesh.size[v]!;
    const least = SEEN * size;
    let sound = true;
    for (let i = 0; i < hole.length; i++) {
      const member = hole[i]!;
      if (marked[member] !== inside) continue;
      for (let k = 0; k < 4; k++) {
        const n = mesh.beyond[4 * member + k]!;
        if (n >= 0 && marked[n] === inside) continue;
        const a = mesh.corner[4 * member + FACE[3 * k]!]!;
        const b = mesh.corner[4 * member + FACE[3 * k + 1]!]!;
        const c = mesh.corner[4 * member + FACE[3 * k + 2]!]!;
        const height = -mesh.six(a, b, c, v) / this.twiceArea(a, b, c);
        if (n < 0 && height < ABOVE_WALL * size && height > 0) return 'hopeless';
        const sides = Math.min(mesh.squared(a, v), mesh.squared(b, v), mesh.squared(c, v));
        if (sides < APART * APART * size * size) return 'hopeless';
        if (height > least) {
          if (sound) mesh.plan(a, c, b, v);
          continue;
        }
        sound = false;
        if (member !== t && !pinned.includes(member)) {
          marked[member] = 0;
          break;
        }
        // The point lies on a face of what must go: what lies beyond goes too.
        if (n < 0 || height < -least) return 'hopeless';
        pinned.push(n);
        marked[n] = inside;
        hole.push(n);
      }
    }
    return sound ? 'sound' : 'again';
  }

  private gatherHole(t: number, inside: number): void {
    const { mesh, hole, marked } = this;
    const members = hole.slice();
    const reached = ++this.round;
    hole.length = 0;
    hole.push(t);
    marked[t] = reached;
    for (let i = 0; i < hole.length; i++) {
      for (let k = 0; k < 4; k++) {
        const n = mesh.beyond[4 * hole[i]! + k]!;
        if (n < 0 || marked[n] !== inside) continue;
        marked[n] = reached;
        hole.push(n);
      }
    }
    for (const member of members) if (marked[member] !== reached) marked[member] = 0;
    for (const member of hole) marked[member] = inside;
  }

  /** Whether every corner of the hole is a corner of what fills it. */
  private keepsVertices(): boolean {
    const { mesh, hole } = this;
    const kept = new Set<number>();
    for (let i = 0; i < 4 * mesh.freshCount; i++) kept.add(mesh.fresh[i]!);
    for (const member of hole) {
      for (let k = 0; k < 4; k++) {
        if (kept.has(mesh.corner[4 * member + k]!)) continue;
        mesh.freshCount = 0;
        return false;
      }
    }
    return true;
  }

  private twiceArea(a: number, b: number, c: number): number {
    const p = this.mesh.position;
    const ux = p[3 * b]! - p[3 * a]!;
    const uy = p[3 * b + 1]! - p[3 * a + 1]!;
    const uz = p[3 * b + 2]! - p[3 * a + 2]!;
    const vx = p[3 * c]! - p[3 * a]!;
    const vy = p[3 * c + 1]! - p[3 * a + 1]!;
    const vz = p[3 * c + 2]! - p[3 * a + 2]!;
    const nx = uy * vz - uz * vy;
    const ny = uz * vx - ux * vz;
    const nz = ux * vy - uy * vx;
    return Math.sqrt(nx * nx + ny * ny + nz * nz);
  }
}

import { InvariantError } from '../core/errors.ts';
import { KeyMap } from './key-map.ts';

/** Corners of the face across from each corner, counter-clockwise seen from outside. */
export const FACE = Int32Array.of(1, 2, 3, 0, 3, 2, 0, 1, 3, 0, 2, 1);

/**
 * Tetrahedra of one region while they are being worked on. Slot t has its corners at 4t and, at the same places, the
 * tetrahedron across the face opposite to each, −1 where that face bounds the region. Dead slots have corner −1 and are
 * used again.
 *
 * Everything is changed by `replace`, which puts some tetrahedra in the place of others that fill the same room, so that
 * the region's boundary always stays what it was.
 */
export class TetMesh {
  vertices = 0;
  /** Slots, dead ones too. */
  slots = 0;
  /** (3v) */
  position = new Float64Array(3 * 4096);
  /** (v) edge length wanted here. */
  size = new Float64Array(4096);
  /** (v) a tetrahedron it is a corner of. */
  home = new Int32Array(4096);
  /** (4t) */
  corner = new Int32Array(4 * 16384);
  /** (4t) */
  beyond = new Int32Array(4 * 16384);
  /** (t) centre and squared radius of the ball through the corners. */
  ball = new Float64Array(4 * 16384);

  /** Corners of what is to be put in place, four each, for `replace`. */
  fresh = new Int32Array(1024);
  freshCount = 0;

  private spare = new Int32Array(1024);
  private spareCount = 0;
  private readonly faces = new KeyMap();

  reset(): void {
    this.vertices = 0;
    this.slots = 0;
    this.spareCount = 0;
    this.freshCount = 0;
  }

  addVertex(x: number, y: number, z: number, size: number): number {
    const v = this.vertices++;
    if (v >= this.size.length) {
      this.position = widen(this.position, new Float64Array(6 * v));
      this.size = widen(this.size, new Float64Array(2 * v));
      this.home = widen(this.home, new Int32Array(2 * v));
    }
    this.position[3 * v] = x;
    this.position[3 * v + 1] = y;
    this.position[3 * v + 2] = z;
    this.size[v] = size;
    this.home[v] = -1;
    return v;
  }

  /** Plans a tetrahedron for the next `replace`. */
  plan(a: number, b: number, c: number, d: number): void {
    const at = 4 * this.freshCount++;
    if (at + 4 > this.fresh.length) this.fresh = widen(this.fresh, new Int32Array(2 * this.fresh.length));
    this.fresh[at] = a;
    this.fresh[at + 1] = b;
    this.fresh[at + 2] = c;
    this.fresh[at + 3] = d;
  }

  /**
   * Puts the planned tetrahedra in the place of `count` old ones.
   *
   * @param bounded whether faces that neither the old nor another planned one has are taken as the region's boundary
   * @throws InvariantError where the planned ones do not fill the same room
   */
  replace(old: ArrayLike<number>, count: number, bounded = false): void {
    const { faces, fresh, freshCount } = this;
    faces.clear();
    for (let i = 0; i < count; i++) this.corner[4 * old[i]!] = -1 - this.corner[4 * old[i]!]!;
    // Faces to what stays, by the place of that side; faces to the boundary as −2.
    const slotOf = (i: number): number => {
      if (i < count) return old[i]!;
      if (this.spareCount > 0) return this.spare[--this.spareCount]!;
      return this.grow();
    };
    let open = 0;
    for (let i = 0; i < count; i++) {
      const t = 4 * old[i]!;
      const first = -1 - this.corner[t]!;
      for (let k = 0; k < 4; k++) {
        const n = this.beyond[t + k]!;
        if (n >= 0 && this.corner[4 * n]! < 0) continue;
        let side = -2;
        if (n >= 0) {
          side = 4 * n;
          while (this.beyond[side] !== old[i]) side++;
        }
        const [p, q, r] = [FACE[3 * k]!, FACE[3 * k + 1]!, FACE[3 * k + 2]!];
        const at = (m: number) => (m === 0 ? first : this.corner[t + m]!);
        faces.addFace(at(p), at(q), at(r), side === -2 ? 0 : side + 1);
        open++;
      }
    }
    const slots: number[] = [];
    for (let i = 0; i < freshCount; i++) slots.push(slotOf(i));
    for (let i = freshCount; i < count; i++) this.bury(old[i]!);
    for (let i = 0; i < freshCount; i++) {
      const t = slots[i]!;
      for (let k = 0; k < 4; k++) {
        const v = fresh[4 * i + k]!;
        this.corner[4 * t + k] = v;
        this.home[v] = t;
      }
      this.setBall(t);
    }
    for (let i = 0; i < freshCount; i++) {
      const t = 4 * slots[i]!;
      for (let k = 0; k < 4; k++) {
        const a = this.corner[t + FACE[3 * k]!]!;
        const b = this.corner[t + FACE[3 * k + 1]!]!;
        const c = this.corner[t + FACE[3 * k + 2]!]!;
        const known = faces.getFace(a, b, c);
        if (known < 0) {
          this.beyond[t + k] = -1;
          faces.addFace(a, b, c, t + k + 1);
          open++;
        } else if (known === 0) {
          this.beyond[t + k] = -1;
          open--;
        } else {
          const other = known - 1;
          this.beyond[t + k] = other >> 2;
          this.beyond[other] = t >> 2;
          open--;
        }
      }
    }
    this.freshCount = 0;
    if (!bounded && open !== 0) throw new InvariantError(`TetMesh.replace: ${open} faces do not fit`);
  }

  /** Corner index of a vertex in a tetrahedron. */
  indexIn(t: number, v: number): number {
    let k = 0;
    while (this.corner[4 * t + k] !== v) k++;
    return k;
  }

  /** Six times the signed volume: positive where d is on the side from which a, b, c run counter-clockwise. */
  six(a: number, b: number, c: number, d: number): number {
    const p = this.position;
    const x = p[3 * a]!;
    const y = p[3 * a + 1]!;
    const z = p[3 * a + 2]!;
    const ux = p[3 * b]! - x;
    const uy = p[3 * b + 1]! - y;
    const uz = p[3 * b + 2]! - z;
    const vx = p[3 * c]! - x;
    const vy = p[3 * c + 1]! - y;
    const vz = p[3 * c + 2]! - z;
    return (
      (uy * vz - uz * vy) * (p[3 * d]! - x) +
      (uz * vx - ux * vz) * (p[3 * d + 1]! - y) +
      (ux * vy - uy * vx) * (p[3 * d + 2]! - z)
    );
  }

  /** 1 for a regular tetrahedron, 0 for a flat one, negative for one turned over: volume over the cube of the mean edge. */
  quality(a: number, b: number, c: number, d: number): number {
    const square =
      this.squared(a, b) +
      this.squared(a, c) +
      this.squared(a, d) +
      this.squared(b, c) +
      this.squared(b, d) +
      this.squared(c, d);
    const mean = square / 6;
    return (Math.SQRT2 * this.six(a, b, c, d)) / (mean * Math.sqrt(mean));
  }

  squared(a: number, b: number): number {
    const p = this.position;
    const x = p[3 * a]! - p[3 * b]!;
    const y = p[3 * a + 1]! - p[3 * b + 1]!;
    const z = p[3 * a + 2]! - p[3 * b + 2]!;
    return x * x + y * y + z * z;
  }

  setBall(t: number): void {
    const p = this.position;
    const a = 3 * this.corner[4 * t]!;
    const b = 3 * this.corner[4 * t + 1]!;
    const c = 3 * this.corner[4 * t + 2]!;
    const d = 3 * this.corner[4 * t + 3]!;
    const ux = p[b]! - p[a]!;
    const uy = p[b + 1]! - p[a + 1]!;
    const uz = p[b + 2]! - p[a + 2]!;
    const vx = p[c]! - p[a]!;
    const vy = p[c + 1]! - p[a + 1]!;
    const vz = p[c + 2]! - p[a + 2]!;
    const wx = p[d]! - p[a]!;
    const wy = p[d + 1]! - p[a + 1]!;
    const wz = p[d + 2]! - p[a + 2]!;
    const nx = uy * vz - uz * vy;
    const ny = uz * vx - ux * vz;
    const nz = ux * vy - uy * vx;
    const scale = 0.5 / (nx * wx + ny * wy + nz * wz);
    const uu = ux * ux + uy * uy + uz * uz;
    const vv = vx * vx + vy * vy + vz * vz;
    const ww = wx * wx + wy * wy + wz * wz;
    const x = scale * (uu * (vy * wz - vz * wy) + vv * (wy * uz - wz * uy) + ww * nx);
    const y = scale * (uu * (vz * wx - vx * wz) + vv * (wz * ux - wx * uz) + ww * ny);
    const z = scale * (uu * (vx * wy - vy * wx) + vv * (wx * uy - wy * ux) + ww * nz);
    this.ball[4 * t] = p[a]! + x;
    this.ball[4 * t + 1] = p[a + 1]! + y;
    this.ball[4 * t + 2] = p[a + 2]! + z;
    this.ball[4 * t + 3] = x * x + y * y + z * z;
  }

  private grow(): number {
    const t = this.slots++;
    if (4 * t >= this.corner.length) {
      this.corner = widen(this.corner, new Int32Array(8 * t));
      this.beyond = widen(this.beyond, new Int32Array(8 * t));
      this.ball = widen(this.ball, new Float64Array(8 * t));
    }
    return t;
  }

  private bury(t: number): void {
    this.corner[4 * t] = -1;
    if (this.spareCount === this.spare.length) this.spare = widen(this.spare, new Int32Array(2 * this.spareCount));
    this.spare[this.spareCount++] = t;
  }
}

function widen<A extends { set(from: A): void }>(old: A, fresh: A): A {
  fresh.set(old);
  return fresh;
}

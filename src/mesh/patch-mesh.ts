import { InvariantError } from '../core/errors.ts';

/** Vertex may move, may be collapsed away. */
export const FREE = 0;
/** Vertex of a rim: shared with a tube, never moves. */
export const RIM = 1;
/** Tip of the fan that closes a rim; the fan's triangles are not part of the patch. */
export const APEX = 2;

/**
 * A closed triangle mesh of one node while it is being worked on, in half-edges.
 *
 * Half-edge h belongs to triangle ⌊h / 3⌋ and runs from `from[h]` to `from[next(h)]`; `twin[h]` runs the other way in
 * the neighbour. Each rim is closed by a fan of *cap* triangles round an apex, so that every vertex has a whole
 * star. Slots of removed triangles have `from` −1 and are used again.
 */
export class PatchMesh {
  vertices = 0;
  /** Slots, dead ones too. */
  triangles = 0;
  /** (3v) */
  position = new Float64Array(3 * 1024);
  /** (v) edge length wanted here. */
  size = new Float64Array(1024);
  /** (v) FREE, RIM, APEX, or −1 once collapsed away. */
  kind = new Int8Array(1024);
  /** (v) one half-edge that leaves it. */
  leaving = new Int32Array(1024);
  /** (3t) */
  from = new Int32Array(3 * 2048);
  /** (3t) */
  twin = new Int32Array(3 * 2048);
  /** (t) 1 where the triangle closes a rim. */
  cap = new Uint8Array(2048);
  /** (t) quality as the remesher scores it. */
  score = new Float64Array(2048);
  /** (t) when the remesher last changed the triangle. */
  changed = new Int32Array(2048);

  private free = new Int32Array(2048);
  private freeCount = 0;

  reset(): void {
    this.vertices = 0;
    this.triangles = 0;
    this.freeCount = 0;
  }

  /** Triangles that are there: about twice the vertices. */
  get living(): number {
    return this.triangles - this.freeCount;
  }

  next(h: number): number {
    return h % 3 === 2 ? h - 2 : h + 1;
  }

  previous(h: number): number {
    return h % 3 === 0 ? h + 2 : h - 1;
  }

  addVertex(x: number, y: number, z: number, size: number, kind: number): number {
    const v = this.vertices++;
    if (v >= this.size.length) this.growVertices();
    this.position[3 * v] = x;
    this.position[3 * v + 1] = y;
    this.position[3 * v + 2] = z;
    this.size[v] = size;
    this.kind[v] = kind;
    this.leaving[v] = -1;
    return v;
  }

  /** A slot for a triangle; its half-edges hold whatever was there. */
  addTriangle(a: number, b: number, c: number): number {
    const t = this.freeCount > 0 ? this.free[--this.freeCount]! : this.triangles++;
    if (t >= this.cap.length) this.growTriangles();
    this.from[3 * t] = a;
    this.from[3 * t + 1] = b;
    this.from[3 * t + 2] = c;
    this.cap[t] = 0;
    this.score[t] = 0;
    return t;
  }

  removeTriangle(t: number): void {
    this.from[3 * t] = -1;
    this.from[3 * t + 1] = -1;
    this.from[3 * t + 2] = -1;
    this.free[this.freeCount++] = t;
  }

  link(g: number, h: number): void {
    this.twin[g] = h;
    this.twin[h] = g;
  }

  /** Whether an edge must stay: it bounds, or lies in, a cap. */
  locked(h: number): boolean {
    return this.cap[(h / 3) | 0] === 1 || this.cap[(this.twin[h]! / 3) | 0] === 1;
  }

  squaredLength(a: number, b: number): number {
    const p = this.position;
    const x = p[3 * a]! - p[3 * b]!;
    const y = p[3 * a + 1]! - p[3 * b + 1]!;
    const z = p[3 * a + 2]! - p[3 * b + 2]!;
    return x * x + y * y + z * z;
  }

  adjacent(a: number, b: number): boolean {
    const start = this.leaving[a]!;
    let h = start;
    do {
      if (this.from[this.next(h)] === b) return true;
      h = this.twin[this.previous(h)]!;
    } while (h !== start);
    return false;
  }

  /** Turns the edge of h inside its two triangles. The caller has made sure that the two far corners are not adjacent. */
  flip(h: number): void {
    const { from, twin, leaving } = this;
    const h1 = this.next(h);
    const h2 = this.previous(h);
    const t = twin[h]!;
    const t1 = this.next(t);
    const t2 = this.previous(t);
    const a = from[h]!;
    const b = from[t]!;
    const c = from[h2]!;
    const d = from[t2]!;
    const bc = twin[h1]!;
    const ca = twin[h2]!;
    const ad = twin[t1]!;
    const db = twin[t2]!;
    from[h] = d;
    from[h1] = c;
    from[h2] = a;
    from[t] = c;
    from[t1] = d;
    from[t2] = b;
    this.link(h1, ca);
    this.link(h2, ad);
    this.link(t1, db);
    this.link(t2, bc);
    leaving[a] = h2;
    leaving[b] = t2;
    leaving[c] = h1;
    leaving[d] = h;
  }

  /** Puts a vertex on the edge of h and joins it to the two far corners. */
  split(h: number, m: number): void {
    const { leaving } = this;
    const h1 = this.next(h);
    const h2 = this.previous(h);
    const t = this.twin[h]!;
    const t2 = this.previous(t);
    const b = this.from[t]!;
    const c = this.from[h2]!;
    const d = this.from[t2]!;
    const bc = this.twin[h1]!;
    const db = this.twin[t2]!;
    // (a,b,c) becomes (a,m,c) and (m,b,c); (b,a,d) becomes (m,a,d) and (b,m,d).
    const n1 = this.addTriangle(m, b, c);
    const n2 = this.addTriangle(b, m, d);
    const { from, twin } = this;
    from[h1] = m;
    from[t] = m;
    twin[h] = t;
    this.link(3 * n1 + 1, bc);
    this.link(3 * n1 + 2, h1);
    this.link(3 * n1, 3 * n2);
    this.link(3 * n2 + 1, t2);
    this.link(3 * n2 + 2, db);
    leaving[m] = h1;
    leaving[b] = 3 * n2;
    leaving[c] = h2;
    leaving[d] = t2;
  }

  /** Draws the start of h into its end. The caller has checked the link condition. */
  collapse(h: number): void {
    const { from, twin, leaving } = this;
    const h1 = this.next(h);
    const h2 = this.previous(h);
    const t = twin[h]!;
    const t1 = this.next(t);
    const t2 = this.previous(t);
    const b = from[t]!;
    const c = from[h2]!;
    const d = from[t2]!;
    const gone = from[h]!;
    let g = h;
    do {
      from[g] = b;
      g = twin[this.previous(g)]!;
    } while (g !== h);
    const bc = twin[h1]!;
    const ca = twin[h2]!;
    const ad = twin[t1]!;
    const db = twin[t2]!;
    this.link(bc, ca);
    this.link(ad, db);
    // twin[h2] ran a→c: it now leaves b. twin[h1] runs c→b, twin[t2] runs b→d, twin[t1] runs d→b.
    leaving[b] = ca;
    leaving[c] = bc;
    leaving[d] = ad;
    this.kind[gone] = -1;
    this.removeTriangle((h / 3) | 0);
    this.removeTriangle((t / 3) | 0);
  }

  /** @throws InvariantError where half-edges do not fit together; for tests and debugging. */
  assertWhole(): void {
    for (let h = 0; h < 3 * this.triangles; h++) {
      if (this.from[h]! < 0) continue;
      const t = this.twin[h]!;
      const ok =
        this.twin[t] === h && this.from[t] === this.from[this.next(h)] && this.from[this.next(t)] === this.from[h];
      if (!ok || this.kind[this.from[h]!]! < 0)
        throw new InvariantError(`PatchMesh: half-edge ${h} does not fit its twin`);
    }
    for (let v = 0; v < this.vertices; v++) {
      if (this.kind[v]! >= 0 && this.from[this.leaving[v]!] !== v)
        throw new InvariantError(`PatchMesh: vertex ${v} has lost its half-edge`);
    }
  }

  private growVertices(): void {
    const wider = 2 * this.size.length;
    this.position = widen(this.position, new Float64Array(3 * wider));
    this.size = widen(this.size, new Float64Array(wider));
    this.kind = widen(this.kind, new Int8Array(wider));
    this.leaving = widen(this.leaving, new Int32Array(wider));
  }

  private growTriangles(): void {
    const wider = 2 * this.cap.length;
    this.from = widen(this.from, new Int32Array(3 * wider));
    this.twin = widen(this.twin, new Int32Array(3 * wider));
    this.cap = widen(this.cap, new Uint8Array(wider));
    this.score = widen(this.score, new Float64Array(wider));
    this.changed = widen(this.changed, new Int32Array(wider));
    this.free = widen(this.free, new Int32Array(wider));
  }
}

function widen<A extends { set(from: A): void }>(old: A, fresh: A): A {
  fresh.set(old);
  return fresh;
}

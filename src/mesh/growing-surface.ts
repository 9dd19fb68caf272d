/** Vertices and triangles of a lumen while it is being put together; columns grow by doubling. */
export class GrowingSurface {
  vertices = 0;
  triangles = 0;
  /** (3v) m */
  position: Float64Array;
  /** (v) */
  row: Int32Array;
  /** (v) */
  along: Float64Array;
  /** (3f) */
  triangle: Int32Array;
  /** (f) */
  patch: Int32Array;
  /** (f) */
  vessel: Int32Array;

  constructor(vertices: number, triangles: number) {
    this.position = new Float64Array(3 * vertices);
    this.row = new Int32Array(vertices);
    this.along = new Float64Array(vertices);
    this.triangle = new Int32Array(3 * triangles);
    this.patch = new Int32Array(triangles);
    this.vessel = new Int32Array(triangles);
  }

  addVertex(x: number, y: number, z: number, row: number, along: number): number {
    const v = this.vertices++;
    if (v >= this.row.length) {
      const wider = 2 * this.row.length + 16;
      this.position = widen(this.position, new Float64Array(3 * wider));
      this.row = widen(this.row, new Int32Array(wider));
      this.along = widen(this.along, new Float64Array(wider));
    }
    this.position[3 * v] = x;
    this.position[3 * v + 1] = y;
    this.position[3 * v + 2] = z;
    this.row[v] = row;
    this.along[v] = along;
    return v;
  }

  addTriangle(a: number, b: number, c: number, patch: number, vessel: number): void {
    const t = this.triangles++;
    if (t >= this.patch.length) {
      const wider = 2 * this.patch.length + 16;
      this.triangle = widen(this.triangle, new Int32Array(3 * wider));
      this.patch = widen(this.patch, new Int32Array(wider));
      this.vessel = widen(this.vessel, new Int32Array(wider));
    }
    this.triangle[3 * t] = a;
    this.triangle[3 * t + 1] = b;
    this.triangle[3 * t + 2] = c;
    this.patch[t] = patch;
    this.vessel[t] = vessel;
  }
}

function widen<A extends { set(from: A): void }>(old: A, fresh: A): A {
  fresh.set(old);
  return fresh;
}

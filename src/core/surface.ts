/** A triangle surface as bytes were read: nothing is assumed of it. */
export interface TriangleSurface {
  /** (3v) m; corners that are equal in all three coordinates have been merged into one. */
  readonly position: Float64Array;
  /** (3f) corner rows, counter-clockwise seen from outside. */
  readonly triangle: Int32Array;
}

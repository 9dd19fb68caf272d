/** Triangles gathered from polygons, each split in a fan from its first corner (right for convex polygons). */
export class PolygonFans {
  readonly triangle: number[] = [];
  private first = -1;
  private last = -1;
  private seen = 0;

  /** Adds the next corner of the polygon. */
  corner(row: number): void {
    if (this.seen === 0) this.first = row;
    else if (this.seen > 1) this.triangle.push(this.first, this.last, row);
    this.last = row;
    this.seen++;
  }

  /** Ends the polygon. @returns its corners; fewer than 3 make no triangle */
  close(): number {
    const { seen } = this;
    this.seen = 0;
    return seen;
  }
}

import { GrowingReals, GrowingRows } from './growing-column.ts';

/** Points and cells of a volume mesh while it is being put together. Corners of cells as in LumenVolume. */
export class GrowingVolume {
  readonly position: GrowingReals;
  /** Row of the vessel each point belongs to, and its place along that vessel. */
  readonly row: GrowingRows;
  readonly along: GrowingReals;
  readonly tetrahedron = new GrowingRows(1 << 14);
  readonly pyramid = new GrowingRows(1 << 10);
  readonly prism = new GrowingRows(1 << 14);
  readonly vesselOfTetrahedron = new GrowingRows(1 << 12);
  readonly vesselOfPyramid = new GrowingRows(1 << 8);
  readonly vesselOfPrism = new GrowingRows(1 << 12);

  constructor(points: number) {
    this.position = new GrowingReals(3 * points);
    this.row = new GrowingRows(points);
    this.along = new GrowingReals(points);
  }

  get points(): number {
    return this.row.count;
  }

  /** How much there is now, for `cutBack`. */
  mark(): readonly number[] {
    return this.columns().map(({ count }) => count);
  }

  /** Forgets what came after a mark. */
  cutBack(mark: readonly number[]): void {
    this.columns().forEach((column, i) => {
      column.count = mark[i]!;
    });
  }

  private columns(): (GrowingReals | GrowingRows)[] {
    const cells = [this.tetrahedron, this.pyramid, this.prism];
    const vessels = [this.vesselOfTetrahedron, this.vesselOfPyramid, this.vesselOfPrism];
    return [this.position, this.row, this.along, ...cells, ...vessels];
  }

  addPoint(x: number, y: number, z: number, row: number, along: number): number {
    const at = this.position.take(3);
    this.position.values[at] = x;
    this.position.values[at + 1] = y;
    this.position.values[at + 2] = z;
    this.row.push(row);
    const last = this.along.take(1);
    this.along.values[last] = along;
    return at / 3;
  }

  /** d lies on the side of a, b, c from which they run counter-clockwise. */
  addTetrahedron(a: number, b: number, c: number, d: number, vessel: number): void {
    const at = this.tetrahedron.take(4);
    const { values } = this.tetrahedron;
    values[at] = a;
    values[at + 1] = b;
    values[at + 2] = c;
    values[at + 3] = d;
    this.vesselOfTetrahedron.push(vessel);
  }

  /** e lies on the side of a, b, c, d from which they run counter-clockwise. */
  addPyramid(a: number, b: number, c: number, d: number, e: number, vessel: number): void {
    const at = this.pyramid.take(5);
    const { values } = this.pyramid;
    values[at] = a;
    values[at + 1] = b;
    values[at + 2] = c;
    values[at + 3] = d;
    values[at + 4] = e;
    this.vesselOfPyramid.push(vessel);
  }

  /** d, e, f lie over a, b, c, on the side from which these run counter-clockwise. */
  addPrism(a: number, b: number, c: number, d: number, e: number, f: number, vessel: number): void {
    const at = this.prism.take(6);
    const { values } = this.prism;
    values[at] = a;
    values[at + 1] = b;
    values[at + 2] = c;
    values[at + 3] = d;
    values[at + 4] = e;
    values[at + 5] = f;
    this.vesselOfPrism.push(vessel);
  }
}

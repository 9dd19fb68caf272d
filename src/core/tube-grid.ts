import { type Memory, ownMemory } from './memory.ts';
import { squaredDistanceToSegment } from './segments.ts';

/** Above this many cells a box of cells is thinned to those near the tube's axis. */
const FEW_CELLS = 27;

/** Columns of a grid, for a reader in another thread. */
export interface TubeGridView {
  readonly min: readonly [number, number, number];
  readonly cell: number;
  readonly across: readonly [number, number, number];
  readonly head: Int32Array;
  readonly next: Int32Array;
  readonly item: Int32Array;
  readonly start: Int32Array;
  readonly packed: Int32Array;
  readonly rows: number;
}

/**
 * Uniform grid over tubes: which rows could come within a given distance of a segment?
 *
 * A tube is listed in every cell that its body touches, so a fat trunk is found from any point at its wall and a query
 * needs no knowledge of how fat its neighbours are. Entries are never taken out: a row that has moved is added again
 * and its old entries only cost a look, because whoever asks measures the row as it stands. Rebuild when rows double.
 *
 * Cost: add and gather O(cells touched).
 */
export class TubeGrid {
  cell: number;
  private minX: number;
  private minY: number;
  private minZ: number;
  private nx: number;
  private ny: number;
  private nz: number;
  private head: Int32Array;
  private next: Int32Array;
  private item: Int32Array;
  private entries = 0;
  private readonly memory: Memory;
  /** (cells + 1) first entry of each cell among `packed`; both empty before the first `pack`. */
  private start: Int32Array = new Int32Array(0);
  private packed: Int32Array = new Int32Array(0);
  private seen: Int32Array;
  private pass = 0;
  /** Rows that the last `gather` found; only the first `gather()` of them count. */
  found: Int32Array = new Int32Array(256);

  /**
   * @param min, max m, box that most tubes lie in; what lies outside is filed in the cells at the edge
   * @param cell     m, edge of a cell; widened where the box would need more than `mostCells`
   * @param memory   where columns are kept
   */
  constructor(
    min: readonly [number, number, number],
    max: readonly [number, number, number],
    cell: number,
    mostCells = 1 << 25,
    memory: Memory = ownMemory,
  ) {
    this.memory = memory;
    const wx = max[0] - min[0];
    const wy = max[1] - min[1];
    const wz = max[2] - min[2];
    let size = Math.max(cell, Math.cbrt((wx * wy * wz) / mostCells), Math.max(wx, wy, wz) / 4096);
    while ((Math.ceil(wx / size) + 1) * (Math.ceil(wy / size) + 1) * (Math.ceil(wz / size) + 1) > mostCells)
      size *= 1.1;
    this.cell = size;
    this.minX = min[0];
    this.minY = min[1];
    this.minZ = min[2];
    this.nx = Math.max(1, Math.ceil(wx / size));
    this.ny = Math.max(1, Math.ceil(wy / size));
    this.nz = Math.max(1, Math.ceil(wz / size));
    this.head = new Int32Array(memory(4 * this.nx * this.ny * this.nz)).fill(-1);
    this.next = new Int32Array(memory(4 * 4096));
    this.item = new Int32Array(memory(4 * 4096));
    this.seen = new Int32Array(1024);
  }

  /** What another thread needs to look into this grid; stale after the next change. */
  view(): TubeGridView {
    const { cell, head, next, item, start, packed } = this;
    const min = [this.minX, this.minY, this.minZ] as const;
    return { min, cell, across: [this.nx, this.ny, this.nz], head, next, item, start, packed, rows: this.seen.length };
  }

  /** Looks into another grid's columns from now on; nothing may be added through this one. */
  adopt(view: TubeGridView): void {
    this.cell = view.cell;
    [this.minX, this.minY, this.minZ] = view.min;
    [this.nx, this.ny, this.nz] = view.across;
    this.head = view.head;
    this.next = view.next;
    this.item = view.item;
    this.start = view.start;
    this.packed = view.packed;
    if (this.seen.length < view.rows) {
      this.seen = new Int32Array(view.rows);
      this.pass = 0;
    }
  }

  /** Lists a row in every cell that the tube a→b of a radius (m) touches. */
  add(row: number, ax: number, ay: number, az: number, bx: number, by: number, bz: number, radius: number): void {
    if (row >= this.seen.length) {
      const wider = new Int32Array(Math.max(2 * this.seen.length, row + 1));
      wider.set(this.seen);
      this.seen = wider;
    }
    const x0 = this.clampX(Math.min(ax, bx) - radius);
    const x1 = this.clampX(Math.max(ax, bx) + radius);
    const y0 = this.clampY(Math.min(ay, by) - radius);
    const y1 = this.clampY(Math.max(ay, by) + radius);
    const z0 = this.clampZ(Math.min(az, bz) - radius);
    const z1 = this.clampZ(Math.max(az, bz) + radius);
    const cells = (x1 - x0 + 1) * (y1 - y0 + 1) * (z1 - z0 + 1);
    if (this.entries + cells > this.next.length) this.widen(this.entries + cells);
    const near = this.nearSquared(radius);
    const thin = cells > 2 && this.inside(ax, ay, az) && this.inside(bx, by, bz);
    for (let z = z0; z <= z1; z++) {
      const cz = this.minZ + (z + 0.5) * this.cell;
      for (let y = y0; y <= y1; y++) {
        const cy = this.minY + (y + 0.5) * this.cell;
        for (let x = x0; x <= x1; x++) {
          if (thin) {
            const cx = this.minX + (x + 0.5) * this.cell;
            if (squaredDistanceToSegment(cx, cy, cz, ax, ay, az, bx, by, bz) > near) continue;
          }
          const at = (z * this.ny + y) * this.nx + x;
          const entry = this.entries++;
          this.item[entry] = row;
          this.next[entry] = this.head[at]!;
          this.head[at] = entry;
        }
      }
    }
  }

  /**
   * Finds every row whose listed tube may come within `reach` (m) of the segment a→b.
   *
   * @returns how many; they stand in `found`, each once, in an order that depends on the order of `add` alone
   */
  gather(ax: number, ay: number, az: number, bx: number, by: number, bz: number, reach: number): number {
    const x0 = this.clampX(Math.min(ax, bx) - reach);
    const x1 = this.clampX(Math.max(ax, bx) + reach);
    const y0 = this.clampY(Math.min(ay, by) - reach);
    const y1 = this.clampY(Math.max(ay, by) + reach);
    const z0 = this.clampZ(Math.min(az, bz) - reach);
    const z1 = this.clampZ(Math.max(az, bz) + reach);
    const cells = (x1 - x0 + 1) * (y1 - y0 + 1) * (z1 - z0 + 1);
    const thin = cells > FEW_CELLS && this.inside(ax, ay, az) && this.inside(bx, by, bz);
    const near = this.nearSquared(reach);
    const pass = ++this.pass;
    const { head, next, item, start, packed, seen, nx, ny } = this;
    const filed = start.length > 0;
    let found: Int32Array = this.found;
    let size = 0;
    for (let z = z0; z <= z1; z++) {
      const cz = this.minZ + (z + 0.5) * this.cell;
      for (let y = y0; y <= y1; y++) {
        const cy = this.minY + (y + 0.5) * this.cell;
        const line = (z * ny + y) * nx;
        for (let x = x0; x <= x1; x++) {
          const at = line + x;
          let entry = head[at]!;
          let from = filed ? start[at]! : 0;
          const to = filed ? start[at + 1]! : 0;
          if (entry < 0 && from === to) continue;
          if (thin) {
            const cx = this.minX + (x + 0.5) * this.cell;
            if (squaredDistanceToSegment(cx, cy, cz, ax, ay, az, bx, by, bz) > near) continue;
          }
          for (; from < to; from++) {
            const row = packed[from]!;
            if (seen[row] === pass) continue;
            seen[row] = pass;
            if (size === found.length) found = this.widenFound();
            found[size++] = row;
          }
          for (; entry >= 0; entry = next[entry]!) {
            const row = item[entry]!;
            if (seen[row] === pass) continue;
            seen[row] = pass;
            if (size === found.length) found = this.widenFound();
            found[size++] = row;
          }
        }
      }
    }
    return size;
  }

  /** Files what has been added cell by cell, so that looks touch memory in a row; more may be added afterwards. */
  pack(): void {
    const cells = this.head.length;
    const start = new Int32Array(this.memory(4 * (cells + 1)));
    const packed = new Int32Array(this.memory(4 * (this.packed.length + this.entries)));
    let size = 0;
    for (let at = 0; at < cells; at++) {
      start[at] = size;
      if (this.start.length > 0) {
        for (let k = this.start[at]!; k < this.start[at + 1]!; k++) packed[size++] = this.packed[k]!;
      }
      for (let entry = this.head[at]!; entry >= 0; entry = this.next[entry]!) packed[size++] = this.item[entry]!;
      this.head[at] = -1;
    }
    start[cells] = size;
    this.start = start;
    this.packed = packed;
    this.entries = 0;
  }

  private widenFound(): Int32Array {
    const wider = new Int32Array(2 * this.found.length);
    wider.set(this.found);
    this.found = wider;
    return wider;
  }

  /** Whether a point is in the box: only there does a cell's centre stand for all that is filed in it. */
  private inside(x: number, y: number, z: number): boolean {
    const fx = (x - this.minX) / this.cell;
    const fy = (y - this.minY) / this.cell;
    const fz = (z - this.minZ) / this.cell;
    return fx >= 0 && fx < this.nx && fy >= 0 && fy < this.ny && fz >= 0 && fz < this.nz;
  }

  private nearSquared(reach: number): number {
    // Half a cell's diagonal, and a hair for rounding.
    const near = reach + 0.8660255 * this.cell;
    return near * near;
  }

  private clampX(x: number): number {
    const i = Math.floor((x - this.minX) / this.cell);
    return i < 0 ? 0 : i >= this.nx ? this.nx - 1 : i;
  }

  private clampY(y: number): number {
    const i = Math.floor((y - this.minY) / this.cell);
    return i < 0 ? 0 : i >= this.ny ? this.ny - 1 : i;
  }

  private clampZ(z: number): number {
    const i = Math.floor((z - this.minZ) / this.cell);
    return i < 0 ? 0 : i >= this.nz ? this.nz - 1 : i;
  }

  private widen(least: number): void {
    const capacity = Math.max(2 * this.next.length, least);
    const next = new Int32Array(this.memory(4 * capacity));
    const item = new Int32Array(this.memory(4 * capacity));
    next.set(this.next);
    item.set(this.item);
    this.next = next;
    this.item = item;
  }
}

import { halfDiagonal, type Region } from './region.ts';

/** Equal boxes of a regular lattice that together hold a region. */
export interface Cells {
  /** m; corner of the lattice, and edges of one cell. */
  readonly origin: readonly [number, number, number];
  readonly edge: readonly [number, number, number];
  /** (c) cells across in x, y, z. */
  readonly across: readonly [number, number, number];
  /** Cells that may meet the region, ascending: row (k·ny + j)·nx + i. */
  readonly row: Int32Array;
  /** (row.length) 1 where the whole cell is certainly inside. */
  readonly full: Uint8Array;
}

/**
 * The cells that may meet a region: those whose centre is not farther outside than half a diagonal, which is certain
 * because depth is 1-Lipschitz.
 *
 * @param wanted about how many cells the region's box is cut into
 * Cost: one depth a cell.
 */
export function coverCells(region: Pick<Region, 'min' | 'max' | 'depth'>, wanted: number): Cells {
  const { min, max } = region;
  const size = [max[0] - min[0], max[1] - min[1], max[2] - min[2]] as const;
  const side = Math.cbrt((size[0] * size[1] * size[2]) / wanted);
  const count = (length: number): number => Math.min(1024, Math.max(1, Math.round(length / side)));
  const across = [count(size[0]), count(size[1]), count(size[2])] as const;
  const edge = [size[0] / across[0], size[1] / across[1], size[2] / across[2]] as const;
  const reach = halfDiagonal(edge[0], edge[1], edge[2]) * (1 + 1e-9);
  const row: number[] = [];
  const full: number[] = [];
  for (let k = 0, at = 0; k < across[2]; k++) {
    for (let j = 0; j < across[1]; j++) {
      for (let i = 0; i < across[0]; i++, at++) {
        const d = region.depth(
          min[0] + (i + 0.5) * edge[0],
          min[1] + (j + 0.5) * edge[1],
          min[2] + (k + 0.5) * edge[2],
        );
        if (d < -reach) continue;
        row.push(at);
        full.push(d > reach ? 1 : 0);
      }
    }
  }
  return { origin: min, edge, across, row: Int32Array.from(row), full: Uint8Array.from(full) };
}

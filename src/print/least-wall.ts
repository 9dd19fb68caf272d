import { squaredDistanceBetweenSegments } from '../core/segments.ts';
import { TubeGrid } from '../core/tube-grid.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { Forest } from '../tree/forest.ts';

/** Where a printed block is thinnest. */
export interface LeastWall {
  /** m between two channels that share no junction, and the rows of their tubes; infinite and −1 where there are no two. */
  readonly between: number;
  readonly rows: readonly [number, number];
  /** m between a channel and the block's surface, and its row; the first vessel of each tree, which opens there, apart. */
  readonly outer: number;
  readonly outerRow: number;
}

/** Distance of points on an axis at which its depth is taken, over the tube's radius. */
const STEP = 0.25;

/**
 * Least thickness of what stands between channels, and between channels and the block's surface. Where two channels meet
 * at a junction the wall between them tapers to nothing, as it must, and is left out.
 *
 * @param forest what is printed
 * @returns      `between` exact; `outer` low by at most an eighth of the vessel's radius
 * Cost: O(n) for evenly spread vessels
 */
export function leastWall(forest: Forest, tissue: Tissue): LeastWall {
  const { position: p, parent, radius, count } = forest;
  const spread = Math.cbrt(tissue.volume / count);
  const grid = new TubeGrid(tissue.min as [number, number, number], tissue.max as [number, number, number], spread);
  for (let row = 0; row < count; row++) {
    const a = 3 * parent[row]!;
    const b = 3 * row;
    if (a >= 0) grid.add(row, p[a]!, p[a + 1]!, p[a + 2]!, p[b]!, p[b + 1]!, p[b + 2]!, radius[row]!);
  }
  let between = Infinity;
  let rows: readonly [number, number] = [-1, -1];
  for (let reach = spread; between === Infinity && reach < 1e4 * spread; reach *= 4) {
    for (let row = 0; row < count; row++) {
      const top = parent[row]!;
      if (top < 0) continue;
      const [a, b] = [3 * top, 3 * row];
      const r = radius[row]!;
      const within = Math.min(reach, between);
      const found = grid.gather(p[a]!, p[a + 1]!, p[a + 2]!, p[b]!, p[b + 1]!, p[b + 2]!, r + within);
      for (let k = 0; k < found; k++) {
        const other = grid.found[k]!;
        const above = parent[other]!;
        if (other <= row || above === top || above === row || other === top) continue;
        const [c, d] = [3 * above, 3 * other];
        const square = squaredDistanceBetweenSegments(
          ...([p[a]!, p[a + 1]!, p[a + 2]!, p[b]!, p[b + 1]!, p[b + 2]!] as const),
          ...([p[c]!, p[c + 1]!, p[c + 2]!, p[d]!, p[d + 1]!, p[d + 2]!] as const),
        );
        const wall = Math.sqrt(square) - r - radius[other]!;
        if (!(wall < Math.min(between, reach))) continue;
        between = wall;
        rows = [row, other];
      }
    }
  }
  const { outer, outerRow } = leastOuter(forest, tissue);
  return { between, rows, outer, outerRow };
}

function leastOuter(forest: Forest, tissue: Tissue): { outer: number; outerRow: number } {
  const { position: p, parent, radius, count } = forest;
  let outer = Infinity;
  let outerRow = -1;
  for (let row = 0; row < count; row++) {
    const top = parent[row]!;
    if (top < 0 || parent[top]! < 0) continue;
    const [a, b] = [3 * top, 3 * row];
    const [ux, uy, uz] = [p[b]! - p[a]!, p[b + 1]! - p[a + 1]!, p[b + 2]! - p[a + 2]!];
    const length = Math.sqrt(ux * ux + uy * uy + uz * uz);
    const steps = Math.ceil(length / (STEP * radius[row]!));
    for (let k = 0; k <= steps; k++) {
      const t = k / steps;
      const depth = tissue.depth(p[a]! + t * ux, p[a + 1]! + t * uy, p[a + 2]! + t * uz);
      // Depth changes no faster than place: between two points it is less by half their distance at most.
      const wall = depth - 0.5 * (length / steps) - radius[row]!;
      if (wall >= outer) continue;
      outer = wall;
      outerRow = row;
    }
  }
  return { outer, outerRow };
}

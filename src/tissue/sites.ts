import type { Random } from '../core/random.ts';
import { type Cells, coverCells } from './cells.ts';
import { createPointGrid, type PointGrid } from './point-grid.ts';
import { halfDiagonal } from './region.ts';
import type { Tissue } from './tissue.ts';

/*
 * Progressive blue noise by dart throwing with a reach that shrinks on refusals.
 * A dart inside the tissue is taken where no site lies nearer than the reach; each refused dart makes the reach smaller
 * by a share 1/(3·n·REFUSALS). Keeping n·reach³ level asks for a fall of 1/(3n) a site, so the reach settles where
 * about REFUSALS darts are refused a site: no volume need be known, and a change of the least depth or of the tissue's
 * form finds its own level.
 * Reach / (volume/n)^(1/3) in the unit box at 2·10⁴ to 10⁶ sites: 0.67 with 6 refusals, 0.69 with 9 and half as much
 * time again. Points thrown without more ado saturate at 0.90 after endless refusals.
 */

/** Darts refused for each one taken, in the long run. */
const REFUSALS = 7;
/** Cells the box is cut into so that darts fall near the tissue only. */
const CELLS = 32_768;
/** Darts in a row that may miss the tissue (or be too shallow) before the stream ends. */
const MOST_MISSES = 200_000;

/** An endless stream of points, every beginning of which is spread evenly over the tissue. */
export interface Sites {
  /** m; the site that the last `next` found. */
  readonly x: number;
  readonly y: number;
  readonly z: number;
  /** Sites found so far. */
  readonly count: number;
  /** (3·count) m; x, y, z of all sites in order; a copy. */
  positions(): Float64Array;
  /** m; no two sites so far are nearer than this. Falls with every refusal. */
  readonly reach: number;
  /**
   * Finds one more site.
   *
   * @param minDepth m; least depth of the site, ≥ 0; may change from call to call
   * @returns false where the stream ends: no place that deep was hit by 200,000 darts, or `reach` is at its floor
   */
  next(minDepth: number): boolean;
}

/**
 * Starts a stream of sites; the same tissue, random stream and calls give the same sites.
 *
 * @param floor m; `reach` falls no lower, the stream ends instead; 0 for no end
 * Source: multi-level dart throwing, D. P. Mitchell (1987) and M. McCool & E. Fiume (1992); from memory; the rule for
 *         the reach is our own.
 * Cost:   5 to 10 µs a site (10⁴ to 10⁶) and about 60 bytes kept.
 */
export function createSites(tissue: Tissue, random: Random, floor = 0): Sites {
  const { min, max } = tissue;
  const cells = coverCells(tissue, CELLS);
  let reach = 2 * halfDiagonal(max[0] - min[0], max[1] - min[1], max[2] - min[2]);
  const grid = createPointGrid(reach);
  const dart = new Float64Array(3);

  /** Throws darts until one is deep enough; its place is left in `dart`. */
  function hit(minDepth: number): boolean {
    for (let miss = 0; miss < MOST_MISSES; miss++) {
      throwDart(cells, random, dart);
      if (tissue.deeperThan(dart[0]!, dart[1]!, dart[2]!, minDepth)) return true;
    }
    return false;
  }

  return {
    get x() {
      return dart[0]!;
    },
    get y() {
      return dart[1]!;
    },
    get z() {
      return dart[2]!;
    },
    get count() {
      return grid.count;
    },
    positions: () => grid.positions(),
    get reach() {
      return reach;
    },
    next(minDepth) {
      for (;;) {
        if (!hit(minDepth)) return false;
        if (!grid.crowded(dart[0]!, dart[1]!, dart[2]!, reach)) {
          grid.add(dart[0]!, dart[1]!, dart[2]!);
          return true;
        }
        const smaller = reach * (1 - 1 / (3 * grid.count * REFUSALS + 1));
        if (smaller < floor) return false;
        reach = smaller;
        // Cells three quarters empty of use: sort anew. The count has then more than doubled, so this is O(1) a site.
        if (reach < 0.7 * grid.edge) grid.refine(reach);
      }
    },
  };
}

function throwDart(cells: Cells, random: Random, out: Float64Array): void {
  const at = cells.row[Math.floor(random.next() * cells.row.length)]!;
  const nx = cells.across[0];
  const ny = cells.across[1];
  const i = at % nx;
  const layer = (at - i) / nx;
  const j = layer % ny;
  const k = (layer - j) / ny;
  out[0] = cells.origin[0] + (i + random.next()) * cells.edge[0];
  out[1] = cells.origin[1] + (j + random.next()) * cells.edge[1];
  out[2] = cells.origin[2] + (k + random.next()) * cells.edge[2];
}

/** How deep holes are looked for: cells down to spacing/(√3·2^LEVELS) get a dart of their own. */
const LEVELS = 2;

/**
 * As many sites at a least spacing as fit, in progressive order.
 *
 * A progressive stream down to the spacing comes first; then every hole is sought by halving cells that no site's ball
 * covers, each cell down to spacing/7 getting one dart, and what is found is added in random order.
 *
 * @param spacing  m, > 0
 * @param minDepth m, ≥ 0
 * @returns        (3n) m; no two sites nearer than `spacing`; under 1 % of the tissue could still take one (measured)
 * Source: maximal Poisson-disk sets by cell refinement, M. Ebeida et al. (2012), Comput Graph Forum 31:785; from memory.
 * Cost:   n is about 0.75 volume/spacing³ (see `expectedSites`): ask that first.
 */
export function spacedSites(tissue: Tissue, random: Random, spacing: number, minDepth: number): Float64Array {
  const stream = createSites(tissue, random, spacing);
  while (stream.next(minDepth));
  const early = stream.count;
  const grid = createPointGrid(spacing);
  const placed = stream.positions();
  for (let i = 0; i < early; i++) grid.add(placed[3 * i]!, placed[3 * i + 1]!, placed[3 * i + 2]!);
  fillHoles(tissue, random, grid, spacing, minDepth);
  const out = grid.positions();
  shuffle(out, early, grid.count, random);
  return out;
}

/** About how many sites `spacedSites` will find, from the volume (m³) and the spacing (m): more where the spacing is not small against the tissue. */
export function expectedSites(volume: number, spacing: number): number {
  return (0.75 * volume) / (spacing * spacing * spacing);
}

function fillHoles(tissue: Tissue, random: Random, grid: PointGrid, spacing: number, minDepth: number): void {
  const cells = coverCells(tissue, CELLS);
  const [nx, ny] = cells.across;
  const leaf = spacing / (Math.sqrt(3) * (1 << LEVELS));

  /** One cell by its centre and edges; true where it needs no further look. */
  function visit(x: number, y: number, z: number, ex: number, ey: number, ez: number): void {
    const reach = halfDiagonal(ex, ey, ez);
    if (!tissue.deeperThan(x, y, z, minDepth - reach)) return;
    // A site whose ball of one spacing holds the whole cell leaves no room in it.
    if (reach < spacing && grid.crowded(x, y, z, spacing - reach)) return;
    const widest = Math.max(ex, ey, ez);
    if (widest <= 4 * leaf) {
      const dx = x + (random.next() - 0.5) * ex;
      const dy = y + (random.next() - 0.5) * ey;
      const dz = z + (random.next() - 0.5) * ez;
      if (tissue.deeperThan(dx, dy, dz, minDepth) && !grid.crowded(dx, dy, dz, spacing)) grid.add(dx, dy, dz);
    }
    if (widest <= leaf) return;
    const halveX = ex > 0.6 * widest;
    const halveY = ey > 0.6 * widest;
    const halveZ = ez > 0.6 * widest;
    const hx = halveX ? ex / 2 : ex;
    const hy = halveY ? ey / 2 : ey;
    const hz = halveZ ? ez / 2 : ez;
    for (let c = 0; c < 8; c++) {
      if ((!halveX && c & 1) || (!halveY && c & 2) || (!halveZ && c & 4)) continue;
      const cx = halveX ? x + (c & 1 ? 0.5 : -0.5) * hx : x;
      const cy = halveY ? y + (c & 2 ? 0.5 : -0.5) * hy : y;
      const cz = halveZ ? z + (c & 4 ? 0.5 : -0.5) * hz : z;
      visit(cx, cy, cz, hx, hy, hz);
    }
  }

  for (let c = 0; c < cells.row.length; c++) {
    const at = cells.row[c]!;
    const i = at % nx;
    const layer = (at - i) / nx;
    const j = layer % ny;
    const k = (layer - j) / ny;
    visit(
      cells.origin[0] + (i + 0.5) * cells.edge[0],
      cells.origin[1] + (j + 0.5) * cells.edge[1],
      cells.origin[2] + (k + 0.5) * cells.edge[2],
      cells.edge[0],
      cells.edge[1],
      cells.edge[2],
    );
  }
}

/** Fisher–Yates over points first … end − 1. */
function shuffle(position: Float64Array, first: number, end: number, random: Random): void {
  for (let i = end - 1; i > first; i--) {
    const j = first + Math.floor(random.next() * (i - first + 1));
    for (let axis = 0; axis < 3; axis++) {
      const kept = position[3 * i + axis]!;
      position[3 * i + axis] = position[3 * j + axis]!;
      position[3 * j + axis] = kept;
    }
  }
}

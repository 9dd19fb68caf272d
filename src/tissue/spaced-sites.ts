import type { Random } from '../core/random.ts';
import { coverCells } from './cells.ts';
import { reachFactor, SITE_CELLS } from './darts.ts';
import { halfDiagonal } from './region.ts';
import { createSiteGrid, type SiteGrid } from './site-grid.ts';
import { createSites } from './sites.ts';
import type { Tissue } from './tissue.ts';

/** How deep holes are looked for: cells down to spacing/(√3·2^LEVELS) get a dart of their own. */
const LEVELS = 2;

/**
 * As many sites at a least spacing as fit, in progressive order.
 *
 * A progressive stream down to the spacing comes first; then every hole is sought by halving cells that no site's ball
 * covers, each cell down to spacing/7 getting one dart, and what is found is added in random order.
 *
 * @param spacing  m, > 0; where demand is w, w^(−1/3) of it is the spacing, and nothing stands where demand is 0
 * @param minDepth m, ≥ 0
 * @returns        (3n) m; no two sites nearer than the lesser spacing of theirs; under 1 % of the tissue could still take one (measured)
 * Source: maximal Poisson-disk sets by cell refinement, M. Ebeida et al. (2012), Comput Graph Forum 31:785; from memory.
 * Cost:   n is about 0.75 volume/spacing³ (see `expectedSites`): ask that first.
 */
export function spacedSites(tissue: Tissue, random: Random, spacing: number, minDepth: number): Float64Array {
  const stream = createSites(tissue, random, spacing);
  while (stream.next(minDepth));
  const early = stream.count;
  const { perfusion } = tissue;
  const grid = createSiteGrid(spacing, reachFactor(perfusion.most), reachFactor(perfusion.least));
  const placed = stream.positions();
  for (let i = 0; i < early; i++) {
    const [x, y, z] = [placed[3 * i]!, placed[3 * i + 1]!, placed[3 * i + 2]!];
    grid.add(x, y, z, reachFactor(perfusion.at(x, y, z)));
  }
  fillHoles(tissue, random, grid, spacing, minDepth);
  const out = grid.positions();
  shuffle(out, early, grid.count, random);
  return out;
}

/** About how many sites `spacedSites` will find, from the volume times demand (m³) and the spacing (m): more where the spacing is not small against the tissue. */
export function expectedSites(volume: number, spacing: number): number {
  return (0.75 * volume) / (spacing * spacing * spacing);
}

function fillHoles(tissue: Tissue, random: Random, grid: SiteGrid, spacing: number, minDepth: number): void {
  const cells = coverCells(tissue, SITE_CELLS);
  const [nx, ny] = cells.across;
  const { perfusion } = tissue;
  const bounds = new Float64Array(2);

  /** One cell by its centre and edges; true where it needs no further look. */
  function visit(x: number, y: number, z: number, ex: number, ey: number, ez: number): void {
    const reach = halfDiagonal(ex, ey, ez);
    if (!tissue.deeperThan(x, y, z, minDepth - reach)) return;
    perfusion.within(x, y, z, reach, bounds);
    if (bounds[1] === 0) return;
    const factor = reachFactor(bounds[1]!);
    const leaf = (spacing * factor) / (Math.sqrt(3) * (1 << LEVELS));
    // A site whose ball of one spacing holds the whole cell leaves no room in it.
    if (grid.crowded(x, y, z, factor, reach)) return;
    const widest = Math.max(ex, ey, ez);
    if (widest <= 4 * leaf) {
      const dx = x + (random.next() - 0.5) * ex;
      const dy = y + (random.next() - 0.5) * ey;
      const dz = z + (random.next() - 0.5) * ez;
      const demand = perfusion.at(dx, dy, dz);
      const own = reachFactor(demand);
      if (demand > 0 && tissue.deeperThan(dx, dy, dz, minDepth) && !grid.crowded(dx, dy, dz, own, 0)) {
        grid.add(dx, dy, dz, own);
      }
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

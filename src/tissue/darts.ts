import type { Random } from '../core/random.ts';
import { type Cells, coverCells } from './cells.ts';
import type { DemandCells } from './perfusion.ts';
import type { Tissue } from './tissue.ts';

/** Cells the box is cut into so that darts fall near the tissue only. */
export const SITE_CELLS = 32_768;

/**
 * Throws one dart; false where it was lost.
 *
 * @param out receives x, y, z in m at 0 to 2 and demand^(−1/3) there at 3
 */
export type ThrowDart = (out: Float64Array) => boolean;

/** Darts that fall on a tissue, or just beside it, as often as blood is demanded there. */
export function createDarts(tissue: Tissue, random: Random): ThrowDart {
  const demanding = tissue.perfusion.cells;
  if (demanding !== null) return throwWeighted(demanding, tissue, random);
  const cells = coverCells(tissue, SITE_CELLS);
  return (out) => {
    throwEven(cells, random, out);
    out[3] = 1;
    return true;
  };
}

/** What a site keeps its distance by, over what it keeps where demand is 1. */
export function reachFactor(demand: number): number {
  return demand === 1 ? 1 : 1 / Math.cbrt(demand);
}

function throwEven(cells: Cells, random: Random, out: Float64Array): void {
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

/** A box is hit as often as its greatest demand times its volume asks, and what falls where demand is less is thinned. */
function throwWeighted(cells: DemandCells, { perfusion }: Tissue, random: Random): ThrowDart {
  const { count, before, centre, half, bounds } = cells;
  return (out) => {
    const wanted = random.next() * before[count]!;
    let low = 0;
    let high = count - 1;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (before[middle + 1]! > wanted) high = middle;
      else low = middle + 1;
    }
    for (let k = 0; k < 3; k++) out[k] = centre[3 * low + k]! + (2 * random.next() - 1) * half[3 * low + k]!;
    const most = bounds[2 * low + 1]!;
    const demand = bounds[2 * low] === most ? most : perfusion.at(out[0]!, out[1]!, out[2]!);
    if (demand < most && !(random.next() * most < demand)) return false;
    out[3] = reachFactor(demand);
    return true;
  };
}

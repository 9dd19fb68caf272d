import type { Random } from '../core/random.ts';
import type { StateIn, StateOut } from '../core/state.ts';
import { createDarts, reachFactor } from './darts.ts';
import { halfDiagonal } from './region.ts';
import { createSiteGrid } from './site-grid.ts';
import type { Tissue } from './tissue.ts';

/*
 * Progressive blue noise by dart throwing with a reach that shrinks on refusals.
 * A dart inside the tissue is taken where no site lies nearer than the reach; each refused dart makes the reach smaller
 * by a share 1/(3·n·REFUSALS). Keeping n·reach³ level asks for a fall of 1/(3n) a site, so the reach settles where
 * about REFUSALS darts are refused a site: no volume need be known, and a change of the least depth or of the tissue's
 * form finds its own level.
 * Reach / (volume/n)^(1/3) in the unit box at 2·10⁴ to 10⁶ sites: 0.67 with 6 refusals, 0.69 with 9 and half as much
 * time again. Points thrown without more ado saturate at 0.90 after endless refusals.
 * Where demand w differs over the tissue, darts fall as often as w and sites keep w^(−1/3) of the reach apart: any part is
 * then a scaled copy of any other, and its sites are as many as its volume times w, from the first on.
 */

/** Darts refused for each one taken, in the long run. */
const REFUSALS = 7;
/** Darts in a row that may miss the tissue (or be too shallow) before the stream ends. */
const MOST_MISSES = 200_000;

/** An endless stream of points, every beginning of which is spread over the tissue as its demand is. */
export interface Sites {
  /** m; the site that the last `next` found. */
  readonly x: number;
  readonly y: number;
  readonly z: number;
  /** Sites found so far. */
  readonly count: number;
  /** (3·count) m; x, y, z of all sites in order; a copy. */
  positions(): Float64Array;
  /**
   * m; where demand is w, no two sites so far are nearer than w^(−1/3) of this (of two demands the greater counts). Falls
   * with every refusal.
   */
  readonly reach: number;
  /**
   * Finds one more site.
   *
   * @param minDepth m; least depth of the site, ≥ 0; may change from call to call
   * @returns false where the stream ends: no place that deep was hit by 200,000 darts, or `reach` is at its floor
   */
  next(minDepth: number): boolean;
  /** Saves what `restore` needs beside the places of the sites found. */
  save(out: StateOut): void;
  /**
   * Goes on as the stream that was saved.
   *
   * @param places (3·count) m; of the sites that it had found, in order
   */
  restore(from: StateIn, places: Float64Array): void;
}

/**
 * Starts a stream of sites; the same tissue, random stream and calls give the same sites.
 *
 * @param floor m; `reach` falls no lower, the stream ends instead; 0 for no end
 * Source: multi-level dart throwing, D. P. Mitchell (1987) and M. McCool & E. Fiume (1992); from memory; the rule for
 *         the reach is our own.
 * Cost:   4 µs a site to 10⁵, 10 µs to 10⁶ (cache misses), and about 60 to 110 bytes kept.
 */
export function createSites(tissue: Tissue, random: Random, floor = 0): Sites {
  const { min, max } = tissue;
  const throwDart = createDarts(tissue, random);
  const [least, most] = [reachFactor(tissue.perfusion.most), reachFactor(tissue.perfusion.least)];
  let reach = (2 * halfDiagonal(max[0] - min[0], max[1] - min[1], max[2] - min[2])) / least;
  let grid = createSiteGrid(reach, least, most);
  const dart = new Float64Array(4);

  /** Throws darts until one is deep enough; its place is left in `dart`. */
  function hit(minDepth: number): boolean {
    for (let miss = 0; miss < MOST_MISSES; miss++) {
      if (throwDart(dart) && tissue.deeperThan(dart[0]!, dart[1]!, dart[2]!, minDepth)) return true;
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
        if (!grid.crowded(dart[0]!, dart[1]!, dart[2]!, dart[3]!, 0)) {
          grid.add(dart[0]!, dart[1]!, dart[2]!, dart[3]!);
          return true;
        }
        const smaller = reach * (1 - 1 / (3 * grid.count * REFUSALS + 1));
        if (smaller < floor) return false;
        reach = smaller;
        grid.shrink(reach);
      }
    },
    save(out) {
      out.list('reach', 'f64', [reach]);
      out.list('random', 'f64', random.state());
    },
    restore(from, places) {
      reach = from.reals('reach')[0]!;
      random.resume(from.reals('random'));
      // Cells of another edge than they had give the same answers.
      grid = createSiteGrid(reach, least, most);
      const { perfusion } = tissue;
      for (let at = 0; at < places.length; at += 3) {
        const [x, y, z] = [places[at]!, places[at + 1]!, places[at + 2]!];
        grid.add(x, y, z, perfusion.cells === null ? 1 : reachFactor(perfusion.at(x, y, z)));
      }
    },
  };
}

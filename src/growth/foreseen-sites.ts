import type { StateIn, StateOut } from '../core/state.ts';
import { measureTerritories } from '../tissue/territories.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { SiteStream } from './demand.ts';

/**
 * A stream of sites of which the first so many come with the share their territory would have if just they were served.
 *
 * Hung with these, terminals are near their final radii from the start. Lab notes, on 20,000 terminals at 6.5 % vessel
 * volume where a ball demands six times as much: with equal shares until the end a tenth of them no longer fitted, and growth
 * did not come to rest in ten minutes; with foreseen shares it did after 15 rounds; with shares measured anew at each
 * doubling too, so that branches carry what they will, in 7 s (10,000: evicted at the end 92, not 652).
 * Sites that stand in for others have a share of 1.
 */
export class ForeseenSites implements SiteStream {
  x = 0;
  y = 0;
  z = 0;
  share = 1;
  private readonly tissue: Tissue;
  private readonly stream: SiteStream;
  private readonly wanted: number;
  private points: Float64Array | null = null;
  private shares: Float64Array = new Float64Array(0);
  private at = 0;

  constructor(tissue: Tissue, stream: SiteStream, wanted: number) {
    this.tissue = tissue;
    this.stream = stream;
    this.wanted = wanted;
  }

  next(minDepth: number): boolean {
    const points = this.points ?? this.foresee(minDepth);
    const { at } = this;
    if (3 * at < points.length) {
      this.x = points[3 * at]!;
      this.y = points[3 * at + 1]!;
      this.z = points[3 * at + 2]!;
      this.share = this.shares[at]!;
      this.at++;
      return true;
    }
    if (!this.stream.next(minDepth)) return false;
    this.x = this.stream.x;
    this.y = this.stream.y;
    this.z = this.stream.z;
    this.share = 1;
    return true;
  }

  save(out: StateOut): void {
    out.list('at', 'i32', [this.points === null ? -1 : this.at]);
    out.put('points', this.points ?? new Float64Array(0));
    out.put('shares', this.shares);
    this.stream.save(out.within('stream'));
  }

  restore(from: StateIn, places: Float64Array): void {
    const [at] = from.wholes('at') as unknown as [number];
    const points = from.reals('points');
    this.at = Math.max(at, 0);
    this.points = at < 0 ? null : points;
    this.shares = from.reals('shares');
    // What came beyond the foreseen sites was found after them.
    const found = new Float64Array(Math.max(points.length, places.length));
    found.set(places);
    found.set(points);
    this.stream.restore(from.within('stream'), found);
  }

  private foresee(minDepth: number): Float64Array {
    const points = new Float64Array(3 * this.wanted);
    let count = 0;
    while (count < this.wanted && this.stream.next(minDepth)) {
      points[3 * count] = this.stream.x;
      points[3 * count + 1] = this.stream.y;
      points[3 * count + 2] = this.stream.z;
      count++;
    }
    this.points = points.slice(0, 3 * count);
    this.shares = sharesOf(this.tissue, this.points);
    return this.points;
  }
}

/** (n) territories of (3n) points over their mean: what shares come to where all of them are served. */
export function sharesOf(tissue: Tissue, points: Float64Array): Float64Array {
  const territory = measureTerritories(tissue, points);
  let mean = 0;
  for (const one of territory) mean += one / territory.length;
  return territory.map((one) => one / mean);
}

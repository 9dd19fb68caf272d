import type { StateIn, StateOut } from '../core/state.ts';
import type { TerminalsSpec } from '../spec/types.ts';

/** A stream of well-spread points, as the tissue gives it. */
export interface SiteStream {
  /** Moves to the next site of at least a depth (m); false when the tissue is full. */
  next(minDepth: number): boolean;
  readonly x: number;
  readonly y: number;
  readonly z: number;
  /** Flow share of the site; 1 where left out. */
  readonly share?: number;
  /** Saves what `restore` needs beside the places of the sites found. */
  save(out: StateOut): void;
  /** Goes on as the stream that was saved; `places` (3n) m, those of the sites it had given. */
  restore(from: StateIn, places: Float64Array): void;
}

/** Tries a site gets before it counts as unreachable. */
const MOST_TRIES = 6;
/** Growth of the tree, as a factor, between two tries of one site: by then its surroundings have changed. */
const WAIT = 1.3;
/** Streamed places in a row that may fail before there is held to be no room: so many, and two a terminal served. */
const MOST_FAILURES = 600;
/** Places tried for each terminal asked for by count, before there is held to be no room. */
const MOST_PLACES = 12;

/**
 * What one tree still has to serve: which site next, which sites came back, how many are wanted.
 *
 * Sites are rows of a growing table, so that a terminal's row can point at its site and an evicted terminal's site can
 * be tried anew.
 */
export class Demand {
  /** Terminals wanted. */
  readonly wanted: number;
  /** Terminals served. */
  served = 0;
  /** Site in hand after `next`. */
  site = -1;
  /** True where each terminal's share follows the demand of its territory. */
  readonly byTerritory: boolean;
  /** m³ at demand 1; the territory that a share of 1 stands for, NaN until territories were measured. */
  territory = Number.NaN;
  private readonly by: TerminalsSpec['by'];
  private readonly stream: SiteStream | null;
  private readonly minDepth: number;
  private readonly waiting: number[] = [];
  private readonly dropped: number[] = [];
  private due: number[] = [];
  private tries: number[] = [];
  private x: number[] = [];
  private y: number[] = [];
  private z: number[] = [];
  private shares: number[] = [];
  private fresh = 0;
  private places = 0;
  private failures = 0;
  /** Sites served when territories were last measured, in the tree's order. */
  private measured: Int32Array | null = null;

  /**
   * @param stream   for `count`: where sites come from; the others have their list
   * @param list     (3k) m, for `spacing` and `points`, in the order to be tried
   * @param share    (k) flow share of each listed site; 1 where null
   * @param minDepth m, asked of streamed sites
   * @param byTerritory see the field; shares given are then those to begin with
   */
  constructor(
    by: TerminalsSpec['by'],
    wanted: number,
    stream: SiteStream | null,
    list: ArrayLike<number> | null,
    share: ArrayLike<number> | null,
    minDepth: number,
    byTerritory = false,
  ) {
    this.by = by;
    this.wanted = wanted;
    this.stream = stream;
    this.minDepth = minDepth;
    this.byTerritory = byTerritory;
    if (list !== null) {
      for (let k = 0; k < list.length / 3; k++) {
        this.addSite(list[3 * k]!, list[3 * k + 1]!, list[3 * k + 2]!, share === null ? 1 : share[k]!);
      }
    }
  }

  /** Takes the next site in hand; false when nothing is left that is worth a try. */
  next(): boolean {
    if (this.served >= this.wanted) return false;
    // A site that came back is tried again once the tree has grown; the oldest first.
    if (this.waiting.length > 0 && this.served >= this.due[this.waiting[0]!]!) return this.take(this.waiting.shift()!);
    if (this.stream === null) {
      if (this.fresh < this.x.length) return this.take(this.fresh++);
    } else if (this.hasPlaces() && this.stream.next(this.minDepth)) {
      this.places++;
      return this.take(this.addSite(this.stream.x, this.stream.y, this.stream.z, this.stream.share ?? 1));
    }
    if (this.waiting.length > 0) return this.take(this.waiting.shift()!);
    return false;
  }

  /** Gives the site in hand, or an evicted one, back to be tried later. */
  giveBack(site: number, evicted: boolean): void {
    if (evicted) this.served--;
    else this.failures++;
    const tries = this.tries[site]! + (evicted ? 0 : 1);
    this.tries[site] = tries;
    // By count one place is as good as another: a failed one is tried only once more.
    if (tries >= (this.by === 'count' ? 2 : MOST_TRIES)) {
      this.dropped.push(site);
      return;
    }
    this.due[site] = evicted ? this.served : Math.ceil(this.served * WAIT) + 1;
    this.waiting.push(site);
  }

  /** Counts the site in hand as served. */
  serve(): void {
    this.served++;
    this.failures = 0;
  }

  /** Puts sites that were given up back in line, and forgets how often any was tried. */
  forgive(): void {
    this.tries.fill(0);
    this.places = 0;
    this.failures = 0;
    for (const site of this.by === 'count' ? [] : this.dropped) {
      this.due[site] = this.served;
      // It has failed before: it may be served past a bend.
      this.tries[site] = 1;
      this.waiting.push(site);
    }
    this.dropped.length = 0;
  }

  /** True for a site that no other can stand in for and that has been tried without success. */
  isPrecious(site: number): boolean {
    return this.by !== 'count' && this.tries[site]! > 0;
  }

  siteX(site: number): number {
    return this.x[site]!;
  }

  siteY(site: number): number {
    return this.y[site]!;
  }

  siteZ(site: number): number {
    return this.z[site]!;
  }

  siteShare(site: number): number {
    return this.shares[site]!;
  }

  /** True if territories were not yet measured for just these sites in this order. */
  isNewService(sites: Int32Array): boolean {
    const { measured } = this;
    return measured === null || measured.length !== sites.length || sites.some((site, i) => site !== measured[i]);
  }

  /** Sets the shares of sites to their territories (m³) over a unit (m³). */
  setTerritories(sites: Int32Array, territory: Float64Array, unit: number): void {
    this.territory = unit;
    this.measured = sites;
    for (let i = 0; i < sites.length; i++) this.shares[sites[i]!] = territory[i]! / unit;
  }

  /** Saves all that is to be known of the sites and of what was tried. */
  save(out: StateOut): void {
    const { served, site, territory, fresh, places, failures } = this;
    out.list('asked', 'f64', [this.wanted, this.minDepth]);
    out.list('numbers', 'f64', [served, site, territory, fresh, places, failures]);
    out.list('waiting', 'i32', this.waiting);
    out.list('dropped', 'i32', this.dropped);
    out.list('due', 'i32', this.due);
    out.list('tries', 'i32', this.tries);
    out.list('x', 'f64', this.x);
    out.list('y', 'f64', this.y);
    out.list('z', 'f64', this.z);
    out.list('shares', 'f64', this.shares);
    if (this.measured !== null) out.put('measured', this.measured);
    this.stream?.save(out.within('stream'));
  }

  /** Becomes the demand that was saved, which had as many wanted and the same depth. */
  restore(from: StateIn): void {
    [this.served, this.site, this.territory, this.fresh, this.places, this.failures] = from.reals(
      'numbers',
    ) as unknown as [number, number, number, number, number, number];
    this.waiting.splice(0);
    for (const site of from.wholes('waiting')) this.waiting.push(site);
    this.dropped.splice(0);
    for (const site of from.wholes('dropped')) this.dropped.push(site);
    this.due = Array.from(from.wholes('due'));
    this.tries = Array.from(from.wholes('tries'));
    this.x = Array.from(from.reals('x'));
    this.y = Array.from(from.reals('y'));
    this.z = Array.from(from.reals('z'));
    this.shares = Array.from(from.reals('shares'));
    this.measured = from.hasWholes('measured') ? from.wholes('measured') : null;
    if (this.stream === null) return;
    const places = new Float64Array(3 * this.x.length);
    for (let k = 0; k < this.x.length; k++) {
      places[3 * k] = this.x[k]!;
      places[3 * k + 1] = this.y[k]!;
      places[3 * k + 2] = this.z[k]!;
    }
    this.stream.restore(from.within('stream'), places);
  }

  get siteCount(): number {
    return this.x.length;
  }

  /** Whether more places are worth asking the stream for. */
  private hasPlaces(): boolean {
    return this.places < MOST_PLACES * this.wanted + 1000 && this.failures < MOST_FAILURES + 2 * this.served;
  }

  private take(site: number): true {
    this.site = site;
    return true;
  }

  private addSite(x: number, y: number, z: number, share: number): number {
    this.x.push(x);
    this.y.push(y);
    this.z.push(z);
    this.shares.push(share);
    this.tries.push(0);
    this.due.push(0);
    return this.x.length - 1;
  }
}

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

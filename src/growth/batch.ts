import type { Memory } from '../core/memory.ts';
import { MOST_PROPOSED } from '../moves/proposer.ts';
import type { Tissue } from '../tissue/tissue.ts';

/** Bits of a coordinate in the key that sites are sorted by. */
const BITS = 10;

/**
 * Sites in hand at once, and what was proposed for each: they are looked at together against a forest that stands still,
 * then hung one after the other.
 *
 * They go in the order of a space-filling curve, so that one site finds in the caches what the site before has asked for.
 */
export class Batch {
  /** Sites in hand. */
  count = 0;
  /** (count) tree that is to serve the site, its number in that tree's demand, and its share. */
  readonly tree: Int32Array;
  readonly site: Int32Array;
  readonly share: Float64Array;
  /** (count, 3) m. */
  readonly position: Float64Array;
  /** (count) placements proposed, (count, keep) rows of their tubes, (count, keep, 3) m, places of their junctions. */
  readonly proposed: Int32Array;
  readonly row: Int32Array;
  readonly at: Float64Array;
  /** Order in which they are served. */
  readonly order: Int32Array;
  readonly keep: number;
  private readonly key: Float64Array;
  private readonly tissue: Tissue;

  /**
   * @param most   sites at once
   * @param keep   placements kept for each, ≤ MOST_PROPOSED
   * @param memory where the columns that proposals are read from and written to may be shared
   */
  constructor(tissue: Tissue, most: number, keep: number, memory: Memory) {
    this.tissue = tissue;
    this.keep = Math.min(keep, MOST_PROPOSED);
    this.tree = new Int32Array(memory(4 * most));
    this.site = new Int32Array(most);
    this.share = new Float64Array(memory(8 * most));
    this.position = new Float64Array(memory(24 * most));
    this.proposed = new Int32Array(memory(4 * most));
    this.row = new Int32Array(memory(4 * most * this.keep));
    this.at = new Float64Array(memory(24 * most * this.keep));
    this.order = new Int32Array(memory(4 * most));
    this.key = new Float64Array(most);
  }

  clear(): void {
    this.count = 0;
  }

  add(tree: number, site: number, x: number, y: number, z: number, share: number): void {
    const k = this.count++;
    this.tree[k] = tree;
    this.site[k] = site;
    this.share[k] = share;
    this.position[3 * k] = x;
    this.position[3 * k + 1] = y;
    this.position[3 * k + 2] = z;
    this.proposed[k] = 0;
    this.key[k] = this.keyOf(x, y, z);
    this.order[k] = k;
  }

  /** Sorts the order along the curve; ties by place in the batch. */
  sort(): void {
    const { key } = this;
    this.order.subarray(0, this.count).sort((a, b) => key[a]! - key[b]! || a - b);
  }

  /** Morton key of a place in the tissue's box. */
  private keyOf(x: number, y: number, z: number): number {
    const { min, max } = this.tissue;
    const cells = 1 << BITS;
    const cell = (value: number, axis: 0 | 1 | 2) => {
      const part = Math.floor(((value - min[axis]) / (max[axis] - min[axis])) * cells);
      return part < 0 ? 0 : part >= cells ? cells - 1 : part;
    };
    return 4 * spread(cell(x, 0)) + 2 * spread(cell(y, 1)) + spread(cell(z, 2));
  }
}

/** Parts the ten low bits of a number by two empty ones each. */
function spread(value: number): number {
  let v = value & 0x3ff;
  v = (v | (v << 16)) & 0x030000ff;
  v = (v | (v << 8)) & 0x0300f00f;
  v = (v | (v << 4)) & 0x030c30c3;
  v = (v | (v << 2)) & 0x09249249;
  return v;
}

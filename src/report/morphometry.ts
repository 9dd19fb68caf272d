import type { Children } from '../tree/children.ts';
import type { TreeRecord } from '../tree/forest.ts';
import { tubeLength } from '../tree/vessels.ts';
import type { AngleStatistics, HortonRatios, OrderStatistics, Spread } from './report.ts';

/** Running mean and spread of one number, stable for millions. */
class Sample {
  count = 0;
  #mean = 0;
  #square = 0;

  add(value: number): void {
    this.count++;
    const off = value - this.#mean;
    this.#mean += off / this.count;
    this.#square += off * (value - this.#mean);
  }

  spread(): Spread {
    const deviation = this.count > 1 ? Math.sqrt(this.#square / (this.count - 1)) : 0;
    // Equal values leave a trace of rounding, which is no spread.
    return { mean: this.#mean, deviation: deviation > 1e-12 * Math.abs(this.#mean) ? deviation : 0 };
  }
}

/**
 * Statistics of every Strahler order.
 *
 * Segments run from junction to junction, elements are maximal chains of segments of one order.
 * Source: orders and elements as in G. S. Kassab et al. (1993), Am J Physiol 265:H350; the rule from memory.
 * Cost:   O(n)
 */
export function measureOrders(record: TreeRecord, children: Children): OrderStatistics[] {
  const { forest, field, order } = record;
  const n = forest.count;
  let highest = 0;
  for (let i = 0; i < n; i++) if (order[i]! > highest) highest = order[i]!;
  // Element of a row: the row it starts at. Sums stand at that row.
  const element = new Int32Array(n);
  const length = new Float64Array(n);
  const bulk = new Float64Array(n);
  const segments = new Int32Array(highest + 1);
  const ways = new Float64Array(highest + 1);
  const pressure = new Float64Array(highest + 1);
  const shear = new Float64Array(highest + 1);
  for (let i = 0; i < n; i++) {
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    const k = order[i]!;
    const atRoot = forest.parent[parent]! < 0;
    if (atRoot || children.start[parent + 1]! - children.start[parent]! > 1) segments[k]!++;
    const start = atRoot || order[parent] !== k ? i : element[parent]!;
    const own = tubeLength(forest, i);
    element[i] = start;
    length[start]! += own;
    bulk[start]! += 2 * forest.radius[i]! * own;
    ways[k]! += own;
    if (field !== null) {
      pressure[k]! += own * 0.5 * (field.pressure[parent]! + field.pressure[i]!);
      shear[k]! += own * field.wallShear[i]!;
    }
  }
  const diameters = Array.from({ length: highest + 1 }, () => new Sample());
  const lengths = Array.from({ length: highest + 1 }, () => new Sample());
  for (let i = 0; i < n; i++) {
    if (forest.parent[i]! < 0 || element[i] !== i) continue;
    diameters[order[i]!]!.add(bulk[i]! / length[i]!);
    lengths[order[i]!]!.add(length[i]!);
  }
  const list: OrderStatistics[] = [];
  for (let k = 1; k <= highest; k++) {
    if (diameters[k]!.count === 0) continue;
    const diameter = diameters[k]!.spread();
    const way = lengths[k]!.spread();
    list.push({
      order: k,
      segments: segments[k]!,
      elements: diameters[k]!.count,
      diameter_mean_m: diameter.mean,
      diameter_deviation_m: diameter.deviation,
      length_mean_m: way.mean,
      length_deviation_m: way.deviation,
      pressure_mean_Pa: field === null ? null : pressure[k]! / ways[k]!,
      wall_shear_mean_Pa: field === null ? null : shear[k]! / ways[k]!,
    });
  }
  return list;
}

const BIN = 10;
/** A star of more vessels than this is no junction of a vessel tree, and its pairs would take for ever. */
const WIDEST = 32;

/** Angles between every two vessels that leave one junction of up to 32, in bins of ten degrees. Cost: O(n). */
export function measureAngles(record: TreeRecord, children: Children): AngleStatistics {
  const { forest } = record;
  const p = forest.position;
  const counts = new Int32Array(180 / BIN);
  const sample = new Sample();
  for (let i = 0; i < forest.count; i++) {
    const end = children.start[i + 1]!;
    if (end - children.start[i]! > WIDEST) continue;
    for (let a = children.start[i]!; a < end; a++) {
      for (let b = a + 1; b < end; b++) {
        const one = children.list[a]!;
        const two = children.list[b]!;
        let dot = 0;
        for (let k = 0; k < 3; k++) dot += (p[3 * one + k]! - p[3 * i + k]!) * (p[3 * two + k]! - p[3 * i + k]!);
        const cosine = dot / (tubeLength(forest, one) * tubeLength(forest, two));
        const angle = (Math.acos(Math.min(1, Math.max(-1, cosine))) * 180) / Math.PI;
        sample.add(angle);
        counts[Math.min(counts.length - 1, Math.floor(angle / BIN))]!++;
      }
    }
  }
  const { mean, deviation } = sample.spread();
  return {
    pairs: sample.count,
    mean_deg: mean,
    deviation_deg: deviation,
    bins: Array.from(counts, (count, k) => ({ from_deg: BIN * k, to_deg: BIN * (k + 1), count })),
  };
}

/**
 * Ratios of successive orders.
 *
 * @returns null below three orders, where a line through the points says nothing
 * Source: R. E. Horton's laws; log10 of number, diameter and length are linear in order, ratio 10^|slope|; from memory.
 */
export function measureHorton(orders: readonly OrderStatistics[]): HortonRatios | null {
  if (orders.length < 3) return null;
  const ratio = (value: (order: OrderStatistics) => number): number => {
    const middle = orders.reduce((sum, order) => sum + order.order, 0) / orders.length;
    let top = 0;
    let bottom = 0;
    for (const order of orders) {
      const off = order.order - middle;
      top += off * Math.log(value(order));
      bottom += off * off;
    }
    return Math.exp(Math.abs(top / bottom));
  };
  return {
    branching: ratio((order) => order.elements),
    diameter: ratio((order) => order.diameter_mean_m),
    length: ratio((order) => order.length_mean_m),
  };
}

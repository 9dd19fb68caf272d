import type { Tally } from '../result.ts';
import type { BoundaryTable } from './boundary.ts';
import type { AxisAt } from './caps.ts';
import { numberColumn, readTable, textColumn } from './table-file.ts';

/** `network.csv`: the one-dimensional network of the part that was meshed. */
export interface NetworkTable {
  readonly count: number;
  readonly name: readonly string[];
  readonly from: readonly string[];
  readonly to: readonly string[];
  /** (6n) m; both ends. */
  readonly end: Float64Array;
  /** m */
  readonly radius: Float64Array;
  readonly length: Float64Array;
  /** m, effective; null where the table has no such column. */
  readonly effectiveLength: Float64Array | null;
  /** m³/s from `from` to `to`; negative the other way. */
  readonly flow: Float64Array;
  /** Pa at `from` and at `to`. */
  readonly pressure0: Float64Array;
  readonly pressure1: Float64Array;
  /** Name of the node nearest to a place. Cost: O(segments). */
  nodeNear(x: number, y: number, z: number): string;
}

const ENDS = ['x0', 'y0', 'z0', 'x1', 'y1', 'z1'];
const NEEDED = ['segment', 'from', 'to', ...ENDS, 'r0_m', 'r1_m', 'length_m', 'flow_m3_s', 'p0_Pa', 'p1_Pa'];

/**
 * Reads a network table.
 *
 * @throws InputError naming the lines that are broken
 */
export function readNetwork(file: string, text: string): NetworkTable {
  const table = readTable(file, text, NEEDED);
  const ends = ENDS.map((column) => numberColumn(table, column));
  const r0 = numberColumn(table, 'r0_m');
  const r1 = numberColumn(table, 'r1_m');
  const end = Float64Array.from({ length: 6 * r0.length }, (_, k) => ends[k % 6]![Math.floor(k / 6)]!);
  const from = textColumn(table, 'from');
  const to = textColumn(table, 'to');
  return {
    count: table.rows.length,
    name: textColumn(table, 'segment'),
    from,
    to,
    end,
    radius: r0.map((r, k) => 0.5 * (r + r1[k]!)),
    length: numberColumn(table, 'length_m'),
    effectiveLength: table.columns.includes('effective_length_m') ? numberColumn(table, 'effective_length_m') : null,
    flow: numberColumn(table, 'flow_m3_s'),
    pressure0: numberColumn(table, 'p0_Pa'),
    pressure1: numberColumn(table, 'p1_Pa'),
    nodeNear: (x, y, z) => {
      const near = nearestEnd(end, x, y, z);
      return (near % 2 === 0 ? from : to)[near >> 1]!;
    },
  };
}

/** Index of the segment's end nearest to a place: 2k and 2k + 1 are the ends of segment k. */
function nearestEnd(end: Float64Array, x: number, y: number, z: number): number {
  let best = -1;
  let least = Infinity;
  for (let k = 0; 3 * k < end.length; k++) {
    const distance = Math.hypot(end[3 * k]! - x, end[3 * k + 1]! - y, end[3 * k + 2]! - z);
    if (distance >= least) continue;
    least = distance;
    best = k;
  }
  return best;
}

/** Finds the axis of the segment that ends at a place. Cost: O(segments) a call. */
export function networkAxis(network: NetworkTable): AxisAt {
  return (x, y, z, near) => {
    let best = -1;
    let bestDistance = near;
    for (let k = 0; k < 2 * network.count; k++) {
      const at = 3 * k;
      const distance = Math.hypot(network.end[at]! - x, network.end[at + 1]! - y, network.end[at + 2]! - z);
      if (distance <= bestDistance) {
        best = k;
        bestDistance = distance;
      }
    }
    if (best < 0) return null;
    const other = best % 2 === 0 ? best + 1 : best - 1;
    return [
      network.end[3 * best]! - network.end[3 * other]!,
      network.end[3 * best + 1]! - network.end[3 * other + 1]!,
      network.end[3 * best + 2]! - network.end[3 * other + 2]!,
    ];
  };
}

export interface NetworkTallies {
  /** Sees ||p0 − p1| − 8μLQ/(πr⁴)| over the whole drop, a segment. */
  readonly drop: Tally;
  /** Sees |Σ in − Σ out| over the largest flow, a node with more than one segment; named by one of them. */
  readonly flow: Tally;
  /** Sees |p of the cap − p of the network's end there| over the whole drop, a row of the boundary table. */
  readonly ends: Tally;
}

/**
 * Measures a network against the laws and against the boundary table.
 *
 * @param lengths   (n) m that resist flow
 * @param viscosity Pa·s, or NaN where the folder does not say: drops are then not looked at
 */
export function measureNetwork(
  network: NetworkTable,
  boundary: BoundaryTable,
  lengths: ArrayLike<number>,
  viscosity: number,
  tallies: NetworkTallies,
): void {
  let lowest = Infinity;
  let highest = -Infinity;
  let largest = 0;
  for (let k = 0; k < network.count; k++) {
    lowest = Math.min(lowest, network.pressure0[k]!, network.pressure1[k]!);
    highest = Math.max(highest, network.pressure0[k]!, network.pressure1[k]!);
    largest = Math.max(largest, Math.abs(network.flow[k]!));
  }
  const drop = highest - lowest;
  const balance = new Map<string, { net: number; segments: number; first: number }>();
  for (let k = 0; k < network.count; k++) {
    const square = network.radius[k]! * network.radius[k]!;
    if (!Number.isNaN(viscosity)) {
      const fall = (8 * viscosity * lengths[k]! * Math.abs(network.flow[k]!)) / (Math.PI * square * square);
      tallies.drop.see(Math.abs(Math.abs(network.pressure0[k]! - network.pressure1[k]!) - fall) / drop, k);
    }
    // Blood runs from the higher to the lower pressure; flows may be magnitudes.
    const along = network.pressure0[k]! >= network.pressure1[k]! ? 1 : -1;
    const flow = along * Math.abs(network.flow[k]!);
    for (const [node, sign] of [
      [network.from[k]!, -1],
      [network.to[k]!, 1],
    ] as const) {
      const entry = balance.get(node) ?? { net: 0, segments: 0, first: k };
      entry.net += sign * flow;
      entry.segments++;
      balance.set(node, entry);
    }
  }
  for (const { net, segments, first } of balance.values()) {
    if (segments > 1) tallies.flow.see(Math.abs(net) / largest, first);
  }
  for (let row = 0; row < boundary.count; row++) {
    const [x, y, z] = [0, 1, 2].map((k) => boundary.centre[3 * row + k]!) as [number, number, number];
    const near = nearestEnd(network.end, x, y, z);
    const pressure = near < 0 ? Number.NaN : (near % 2 === 0 ? network.pressure0 : network.pressure1)[near >> 1]!;
    tallies.ends.see(Math.abs(boundary.pressure[row]! - pressure) / drop, row);
  }
}

import { halfDiagonal, type Region } from './region.ts';

/** Demand for blood over a tissue, relative: 1 where nothing else was asked. */
export interface Perfusion {
  /** True where demand is 1 everywhere; then none of the others need be asked. */
  readonly uniform: boolean;
  /** m³; the integral of demand over the tissue: its volume where uniform. */
  readonly whole: number;
  /** Relative standard error of `whole`. */
  readonly error: number;
  /** Boxes that hold all that is demanded; null where uniform. */
  readonly cells: DemandCells | null;
  /** Greatest weight, and least above 0, that a point may have. */
  readonly most: number;
  readonly least: number;
  /** Demand at a point, ≥ 0; meant for points of the tissue, told for all. */
  at(x: number, y: number, z: number): number;
  /**
   * Bounds of the demand within a ball.
   *
   * @param out receives the least at 0 and the greatest at 1; equal only where demand is the same in the whole ball
   */
  within(x: number, y: number, z: number, radius: number, out: Float64Array): void;
}

/** A part of the tissue and its weight, ≥ 0. */
export interface WeightedRegion {
  readonly region: Region;
  readonly weight: number;
}

/** Demand that is 1 everywhere in a tissue of this volume (m³). */
export function evenPerfusion(volume: number, error: number): Perfusion {
  return {
    uniform: true,
    whole: volume,
    error,
    cells: null,
    most: 1,
    least: 1,
    at: () => 1,
    within: (_x, _y, _z, _radius, out) => {
      out[0] = 1;
      out[1] = 1;
    },
  };
}

/** What weighted parts say of demand, before it is integrated over a tissue. */
export type Weighing = Pick<Perfusion, 'most' | 'least' | 'at' | 'within'>;

/** Demand of a point: the weight of the last part that holds it, 1 where none does. Cost: a depth a part. */
export function weighParts(parts: readonly WeightedRegion[]): Weighing {
  const weights = [1, ...parts.map((part) => part.weight)];
  const positive = weights.filter((weight) => weight > 0);
  return {
    most: Math.max(...weights),
    least: Math.min(...positive),
    at(x, y, z) {
      for (let k = parts.length - 1; k >= 0; k--) if (parts[k]!.region.deeperThan(x, y, z, 0)) return parts[k]!.weight;
      return 1;
    },
    within(x, y, z, radius, out) {
      let low = Number.POSITIVE_INFINITY;
      let high = 0;
      for (let k = parts.length; k >= 0; k--) {
        // Depth inside a part may be short of the distance to its boundary: then the ball is only held to be mixed.
        const depth = k === 0 ? radius : parts[k - 1]!.region.depth(x, y, z);
        if (depth < -radius) continue;
        const weight = k === 0 ? 1 : parts[k - 1]!.weight;
        if (weight < low) low = weight;
        if (weight > high) high = weight;
        if (depth >= radius) break;
      }
      out[0] = low;
      out[1] = high;
    },
  };
}

/** Boxes that hold all of a tissue that demands anything, small where demand differs within them. */
export interface DemandCells {
  readonly count: number;
  /** (3 count) m; centre, and half edges. */
  readonly centre: Float64Array;
  readonly half: Float64Array;
  /** (2 count) bounds of the demand in each. */
  readonly bounds: Float64Array;
  /** (count) 1 where the whole box is certainly in the tissue. */
  readonly full: Uint8Array;
  /** (count + 1) sum of (greatest demand × volume) of the boxes before each. */
  readonly before: Float64Array;
}

/** Boxes that demand is first cut into, and share of all demand above which a box of mixed demand is cut again. */
const FIRST = 8192;
const COARSE = 1 / 16_384;
/** Times that a box may be cut in eight. */
const PASSES = 8;

/**
 * Cuts a tissue's box until hardly any demand is in boxes where it is not the same all over.
 *
 * Cost: a depth of the tissue and of each part a box, some 10⁵ boxes.
 */
export function coverDemand(region: Pick<Region, 'min' | 'max' | 'depth'>, weighing: Weighing): DemandCells {
  const size = [0, 1, 2].map((k) => region.max[k as 0]! - region.min[k as 0]!) as [number, number, number];
  const side = Math.cbrt((size[0] * size[1] * size[2]) / FIRST);
  const across = size.map((length) => Math.min(256, Math.max(1, Math.round(length / side)))) as [
    number,
    number,
    number,
  ];
  const [hx, hy, hz] = [0, 1, 2].map((k) => size[k]! / (2 * across[k]!)) as [number, number, number];
  let boxes: number[] = [];
  for (let k = 0; k < across[2]; k++)
    for (let j = 0; j < across[1]; j++)
      for (let i = 0; i < across[0]; i++)
        look(boxes, region, weighing, [
          region.min[0] + (2 * i + 1) * hx,
          region.min[1] + (2 * j + 1) * hy,
          region.min[2] + (2 * k + 1) * hz,
          hx,
          hy,
          hz,
        ]);
  for (let pass = 0; pass < PASSES; pass++) {
    let sum = 0;
    for (let at = 0; at < boxes.length; at += WIDE) sum += boxWhole(boxes, at);
    const next: number[] = [];
    let same = true;
    for (let at = 0; at < boxes.length; at += WIDE) {
      const mixed = boxes[at + 6] !== boxes[at + 7];
      if (!mixed || boxWhole(boxes, at) <= COARSE * sum) {
        for (let k = 0; k < WIDE; k++) next.push(boxes[at + k]!);
        continue;
      }
      same = false;
      cut(next, region, weighing, boxes, at);
    }
    boxes = next;
    if (same) break;
  }
  const count = boxes.length / WIDE;
  const cells: DemandCells = {
    count,
    centre: new Float64Array(3 * count),
    half: new Float64Array(3 * count),
    bounds: new Float64Array(2 * count),
    full: new Uint8Array(count),
    before: new Float64Array(count + 1),
  };
  for (let c = 0; c < count; c++) {
    const at = WIDE * c;
    for (let k = 0; k < 3; k++) {
      cells.centre[3 * c + k] = boxes[at + k]!;
      cells.half[3 * c + k] = boxes[at + 3 + k]!;
    }
    cells.bounds[2 * c] = boxes[at + 6]!;
    cells.bounds[2 * c + 1] = boxes[at + 7]!;
    cells.full[c] = boxes[at + 8]!;
    cells.before[c + 1] = cells.before[c]! + boxWhole(boxes, at);
  }
  return cells;
}

/** Numbers a box in a list takes: centre, half edges, bounds of demand, full. */
const WIDE = 9;

function look(
  into: number[],
  region: Pick<Region, 'depth'>,
  weighing: Weighing,
  [x, y, z, hx, hy, hz]: readonly [number, number, number, number, number, number],
): void {
  const reach = halfDiagonal(2 * hx, 2 * hy, 2 * hz) * (1 + 1e-9);
  const depth = region.depth(x, y, z);
  if (depth < -reach) return;
  const range = new Float64Array(2);
  weighing.within(x, y, z, reach, range);
  if (range[1] === 0) return;
  into.push(x, y, z, hx, hy, hz, range[0]!, range[1]!, depth > reach ? 1 : 0);
}

function cut(
  into: number[],
  region: Pick<Region, 'depth'>,
  weighing: Weighing,
  boxes: readonly number[],
  at: number,
): void {
  const [x, y, z] = [boxes[at]!, boxes[at + 1]!, boxes[at + 2]!];
  const [hx, hy, hz] = [0.5 * boxes[at + 3]!, 0.5 * boxes[at + 4]!, 0.5 * boxes[at + 5]!];
  for (let c = 0; c < 8; c++) {
    const side = (bit: number) => (c & bit ? 1 : -1);
    look(into, region, weighing, [x + side(1) * hx, y + side(2) * hy, z + side(4) * hz, hx, hy, hz]);
  }
}

/** Greatest demand × volume of a box in a list. */
function boxWhole(boxes: readonly number[], at: number): number {
  return 8 * boxes[at + 3]! * boxes[at + 4]! * boxes[at + 5]! * boxes[at + 7]!;
}

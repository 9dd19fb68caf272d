import type { TreeRecord } from './library.ts';
import type { Quantity } from './quantities.ts';

/** Vessels in one row of every texture: 2¹¹, so that two texels a vessel make 4096, which any WebGL 2 device takes. */
export const ROW_SHIFT = 11;
export const ROW_VESSELS = 1 << ROW_SHIFT;

/** Bits of a vessel's first mark. */
export const MARK = { way: 1, chosen: 2, drain: 4 } as const;

/**
 * A tree as the graphics card takes it: columns by vessel number, padded to whole texture rows. Scene coordinates are
 * (m − centre) × scale, in which everything fits the unit ball, so that float32 is fine enough.
 */
export interface Scene {
  readonly record: TreeRecord;
  /** Vessels drawn. */
  readonly count: number;
  /** Texture rows. */
  readonly rows: number;
  /** m */
  readonly centre: readonly [number, number, number];
  /** Scene units a metre. */
  readonly scale: number;
  /** m; ends of the box round all nodes. */
  readonly low: readonly number[];
  readonly high: readonly number[];
  /** (8 × padded) proximal x, y, z, radius, then distal ones, in scene units. */
  readonly ends: Float32Array;
  /** (2 × padded) bits of MARK, then the order (at most 255). */
  readonly marks: Uint8Array;
  /** (2 × padded) value at the proximal and the distal end, divided by `unit` of fillValues. */
  readonly values: Float32Array;
  /** (count) forest row of each vessel. */
  readonly rowOf: Int32Array;
  /** (forest rows) vessel of each row, −1 for a root. */
  readonly vesselOf: Int32Array;
  readonly leastRadius: number;
  readonly largestRadius: number;
  readonly highestOrder: number;
}

/**
 * Packs a tree for drawing. Cost: O(n), no object a vessel; 42 bytes a vessel for the card and 8 for the maps, and 24
 * for the index that tubes.ts adds.
 */
export function packScene(record: TreeRecord): Scene {
  const { forest, kinds, order } = record;
  const n = forest.count;
  const count = n - (forest.treeStart.length - 1);
  const rows = Math.max(1, Math.ceil(count / ROW_VESSELS));
  const padded = rows * ROW_VESSELS;
  const { low, high, centre, reach } = boundsOf(record);
  const scale = 1 / reach;
  const ends = new Float32Array(8 * padded);
  const marks = new Uint8Array(2 * padded);
  const rowOf = new Int32Array(count);
  const vesselOf = new Int32Array(n).fill(-1);
  const { position, radius, parent, tree } = forest;
  let leastRadius = Infinity;
  let largestRadius = 0;
  let highestOrder = 1;
  let vessel = 0;
  for (let row = 0; row < n; row++) {
    const from = parent[row]!;
    if (from < 0) continue;
    const own = radius[row]!;
    for (let k = 0; k < 3; k++) {
      ends[8 * vessel + k] = (position[3 * from + k]! - centre[k]!) * scale;
      ends[8 * vessel + 4 + k] = (position[3 * row + k]! - centre[k]!) * scale;
    }
    ends[8 * vessel + 3] = own * scale;
    ends[8 * vessel + 7] = own * scale;
    marks[2 * vessel] = kinds[tree[row]!] === 'drain' ? MARK.drain : 0;
    marks[2 * vessel + 1] = Math.min(255, order[row]!);
    if (own < leastRadius) leastRadius = own;
    if (own > largestRadius) largestRadius = own;
    if (order[row]! > highestOrder) highestOrder = order[row]!;
    rowOf[vessel] = row;
    vesselOf[row] = vessel++;
  }
  return {
    record,
    count,
    rows,
    centre,
    scale,
    low,
    high,
    ends,
    marks,
    values: new Float32Array(2 * padded),
    rowOf,
    vesselOf,
    leastRadius,
    largestRadius,
    highestOrder,
  };
}

/** Box round all nodes, its middle, and the radius of the ball there that holds every tube: m, > 0. */
function boundsOf(record: TreeRecord): {
  low: number[];
  high: number[];
  centre: [number, number, number];
  reach: number;
} {
  const { position, radius, count } = record.forest;
  const low = [Infinity, Infinity, Infinity];
  const high = [-Infinity, -Infinity, -Infinity];
  let widest = 0;
  for (let row = 0; row < count; row++) {
    for (let k = 0; k < 3; k++) {
      const x = position[3 * row + k]!;
      if (x < low[k]!) low[k] = x;
      if (x > high[k]!) high[k] = x;
    }
    if (radius[row]! > widest) widest = radius[row]!;
  }
  if (count === 0) return { low: [0, 0, 0], high: [0, 0, 0], centre: [0, 0, 0], reach: 1 };
  const centre = low.map((x, k) => 0.5 * (x + high[k]!)) as [number, number, number];
  const half = low.map((x, k) => 0.5 * (high[k]! - x));
  return { low, high, centre, reach: Math.hypot(half[0]!, half[1]!, half[2]!) + widest || 1 };
}

/**
 * Sets the proximal radii: as solved (each tube straight), or tapered, where a tube starts as wide as its parent but at
 * most 1.26 (2^(1/3), an even split under the cube law) times its own radius. Only the drawing changes.
 */
export function setTaper(scene: Scene, taper: boolean): void {
  const { parent, radius } = scene.record.forest;
  for (let vessel = 0; vessel < scene.count; vessel++) {
    const row = scene.rowOf[vessel]!;
    const own = radius[row]!;
    const start = taper ? Math.max(own, Math.min(radius[parent[row]!]!, 1.26 * own)) : own;
    scene.ends[8 * vessel + 3] = start * scene.scale;
  }
}

/**
 * Writes a quantity's values at both ends of every vessel.
 *
 * @param values (rows of the forest) SI
 * @param unit   SI size of one drawn unit, near the values', so that float32 neither over- nor underflows
 */
export function fillValues(scene: Scene, quantity: Quantity, values: ArrayLike<number>, unit: number): void {
  const parent = scene.record.forest.parent;
  for (let vessel = 0; vessel < scene.count; vessel++) {
    const row = scene.rowOf[vessel]!;
    const far = values[row]! / unit;
    scene.values[2 * vessel] = quantity.at === 'node' ? values[parent[row]!]! / unit : far;
    scene.values[2 * vessel + 1] = far;
  }
}

/** Marks one vessel as chosen and others as its way to the root; clears all earlier marks. −1 chooses none. */
export function markWay(scene: Scene, chosen: number, way: readonly number[]): void {
  for (let vessel = 0; vessel < scene.count; vessel++) scene.marks[2 * vessel]! &= MARK.drain;
  for (const vessel of way) scene.marks[2 * vessel]! |= MARK.way;
  if (chosen >= 0) scene.marks[2 * chosen]! |= MARK.chosen | MARK.way;
}

/** What is left out of the drawing. */
export interface Hiding {
  /** m; thinner vessels are hidden. */
  readonly thinnest: number;
  /** Vessels of a lower order are hidden. */
  readonly lowestOrder: number;
}

/** Least radius in scene units that is drawn: a hair under the limit, as a float32 may round up past it. */
export function drawnRadius(scene: Scene, hiding: Hiding): number {
  return hiding.thinnest * scene.scale * (1 - 1e-6);
}

/** Vessels that are drawn. Cost: O(n). */
export function countShown(scene: Scene, hiding: Hiding): number {
  const limit = drawnRadius(scene, hiding);
  let shown = 0;
  for (let vessel = 0; vessel < scene.count; vessel++) {
    if (scene.ends[8 * vessel + 7]! >= limit && scene.marks[2 * vessel + 1]! >= hiding.lowestOrder) shown++;
  }
  return shown;
}

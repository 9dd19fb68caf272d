import { inputError } from '../core/errors.ts';
import { squaredDistanceBetweenSegments } from '../core/segments.ts';
import { TubeGrid } from '../core/tube-grid.ts';
import type { FlowField, Forest } from '../tree/forest.ts';
import { tubeLength } from '../tree/vessels.ts';

/** Room asked between an extension and any other tube, over the sum of their radii. */
const APART = 1.05;
/** Shares of the extension that are tried where the whole of it meets something. */
const SHARES = [1, 0.75, 0.5, 0.25] as const;

/** A forest whose ends were drawn out straight. */
export interface ExtendedForest {
  readonly forest: Forest;
  /** (n) m that the cap at each root and terminal was moved out by; 0 elsewhere. */
  readonly extension: Float64Array;
  /** Caps that were moved out less than asked. */
  readonly short: readonly ShortExtension[];
}

export interface ShortExtension {
  /** Row of the cap's node. */
  readonly row: number;
  /** Row of the tube that is in the way. */
  readonly blocker: number;
  /** m */
  readonly got: number;
  readonly wanted: number;
}

/**
 * Draws the vessels at all roots and terminals out along their axes, so that a flow solver can set a developed profile
 * well away from what it computes. The rest of the forest stays.
 *
 * Where another vessel is in the way an extension ends before it, and is listed.
 *
 * @param diameters lengths of the extensions in diameters of their vessels, 0 to 100
 * @param which     ends that are drawn out
 * @throws InputError for a number out of range
 * Cost:   O(n) for a grid, and per cap what lies near it
 */
export function extendCaps(forest: Forest, diameters: number, which: 'all' | 'roots' = 'all'): ExtendedForest {
  if (!(diameters >= 0 && diameters <= 100))
    throw inputError('out-of-range', 'extend', `got ${diameters} diameters, expected 0 to 100`);
  const n = forest.count;
  const extension = new Float64Array(n);
  const position = Float64Array.from(forest.position);
  const short: ShortExtension[] = [];
  const grid = listTubes(forest);
  const ends = listEnds(forest);
  for (const { row, vessel, inner } of ends) {
    const wanted = 2 * diameters * forest.radius[vessel]!;
    if (wanted === 0 || (which === 'roots' && forest.parent[row]! >= 0)) continue;
    const scale = wanted / tubeLength(forest, vessel);
    const step = [0, 1, 2].map((k) => scale * (forest.position[3 * row + k]! - forest.position[3 * inner + k]!));
    let blocker = -1;
    let got = 0;
    for (const share of SHARES) {
      const end = [0, 1, 2].map((k) => forest.position[3 * row + k]! + share * step[k]!);
      const met = meets(forest, position, grid, row, vessel, inner, end);
      if (blocker < 0) blocker = met;
      if (met >= 0) continue;
      got = share * wanted;
      for (let k = 0; k < 3; k++) position[3 * row + k] = end[k]!;
      break;
    }
    extension[row] = got;
    if (got < wanted) short.push({ row, blocker, got, wanted });
    else listTube(grid, forest, position, vessel);
  }
  return { forest: { ...forest, position }, extension, short };
}

/** Roots and terminals: the node, the tube that ends there and the tube's other node. */
function listEnds(forest: Forest): { row: number; vessel: number; inner: number }[] {
  const n = forest.count;
  const daughter = new Int32Array(n).fill(-1);
  for (let row = 0; row < n; row++) if (forest.parent[row]! >= 0) daughter[forest.parent[row]!] = row;
  const ends: { row: number; vessel: number; inner: number }[] = [];
  for (let row = 0; row < n; row++) {
    const parent = forest.parent[row]!;
    if (parent < 0) ends.push({ row, vessel: daughter[row]!, inner: daughter[row]! });
    else if (daughter[row]! < 0) ends.push({ row, vessel: row, inner: parent });
  }
  return ends;
}

function listTubes(forest: Forest): TubeGrid {
  const min: [number, number, number] = [Infinity, Infinity, Infinity];
  const max: [number, number, number] = [-Infinity, -Infinity, -Infinity];
  for (let i = 0; i < 3 * forest.count; i++) {
    const k = i % 3;
    min[k] = Math.min(min[k]!, forest.position[i]!);
    max[k] = Math.max(max[k]!, forest.position[i]!);
  }
  // A hair wider: a flat forest has a box of no thickness.
  const wide = Math.max(max[0] - min[0], max[1] - min[1], max[2] - min[2]);
  for (let k = 0; k < 3; k++) {
    min[k]! -= 1e-3 * wide;
    max[k]! += 1e-3 * wide;
  }
  const grid = new TubeGrid(min, max, wide / Math.max(1, Math.cbrt(forest.count)), 1 << 22);
  for (let row = 0; row < forest.count; row++)
    if (forest.parent[row]! >= 0) listTube(grid, forest, forest.position, row);
  return grid;
}

function listTube(grid: TubeGrid, forest: Forest, position: ArrayLike<number>, row: number): void {
  const [a, b] = [3 * forest.parent[row]!, 3 * row];
  const p = position;
  grid.add(row, p[a]!, p[a + 1]!, p[a + 2]!, p[b]!, p[b + 1]!, p[b + 2]!, APART * forest.radius[row]!);
}

/** Row of a tube that the extension of a cap to `end` comes too near to, or −1. */
function meets(
  forest: Forest,
  position: Float64Array,
  grid: TubeGrid,
  row: number,
  vessel: number,
  inner: number,
  end: readonly number[],
): number {
  const r = forest.radius[vessel]!;
  const tip = [0, 1, 2].map((k) => forest.position[3 * row + k]!);
  const [ax, ay, az] = [tip[0]!, tip[1]!, tip[2]!];
  const [bx, by, bz] = [end[0]!, end[1]!, end[2]!];
  const found = grid.gather(ax, ay, az, bx, by, bz, APART * r);
  let worst = -1;
  for (let k = 0; k < found; k++) {
    const other = grid.found[k]!;
    const above = forest.parent[other]!;
    // Tubes that meet the other end of this one lie behind it.
    if (other === vessel || above === inner || other === inner) continue;
    const [a, b] = [3 * above, 3 * other];
    const p = position;
    const square = squaredDistanceBetweenSegments(
      ...([ax, ay, az, bx, by, bz] as const),
      ...([p[a]!, p[a + 1]!, p[a + 2]!] as const),
      ...([p[b]!, p[b + 1]!, p[b + 2]!] as const),
    );
    const apart = APART * (r + forest.radius[other]!);
    if (square < apart * apart && (worst < 0 || other < worst)) worst = other;
  }
  return worst;
}

/**
 * Carries a solution over to a forest with extensions: flows and what was solved inside stay, and along an extension
 * pressure and transit go on as they went, which is what developed flow does there.
 */
export function extendField(extended: ExtendedForest, original: Forest, field: FlowField): FlowField {
  const { forest, extension } = extended;
  const goOn = (column: ArrayLike<number>): Float64Array => {
    const out = Float64Array.from(column);
    for (const { row, vessel, inner } of listEnds(original)) {
      if (extension[row] === 0) continue;
      const steeper = (column[row]! - column[inner]!) / tubeLength(original, vessel);
      out[row] = column[row]! + steeper * extension[row]!;
    }
    return out;
  };
  return { ...field, forest, pressure: goOn(field.pressure), transit: goOn(field.transit) };
}

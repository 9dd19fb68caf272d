import { segmentToSegment } from '../axis-distance.ts';
import { buildBoxTree, FAN, visitNearLeaves } from '../box-tree.ts';
import { Tally, type TallyHead } from '../result.ts';
import type { NetworkTable } from './network.ts';
import { readSolids } from './solids.ts';
import { listEdges, measureComponents } from './topology.ts';
import { weldCorners } from './weld.ts';

/** What `mesh.json` states of a negative; NaN where it states nothing. */
export interface NegativeNotes {
  /** m³ */
  readonly solid: number;
  /** m */
  readonly between: number;
  readonly asked: number;
  /** Whether the network is that of caps that were drawn out, which the negative's are not. */
  readonly extended: boolean;
}

/** Share of the solid's volume that the file may be off by: corners are rounded to single precision. */
const VOLUME_OFF = 1e-4;
/** m; the same for a wall. */
const WALL_OFF = 1e-9;

/** Reads what `mesh.json` states of a negative. */
export function readNegativeNotes(negative: unknown, extensions: unknown): NegativeNotes {
  const value = (typeof negative === 'object' && negative !== null ? negative : {}) as Record<string, unknown>;
  const number = (key: string): number => (typeof value[key] === 'number' ? value[key] : Number.NaN);
  return {
    solid: number('solid_m3'),
    between: number('least_wall_between_channels_m'),
    asked: number('least_wall_asked_m'),
    extended: typeof extensions === 'object' && extensions !== null,
  };
}

/**
 * Looks at a printable negative: one closed solid of the stated volume, and walls between channels of the stated least
 * thickness, taken from the network.
 *
 * @param unit    m, one unit of length of the file
 * @param network where the channels are; null where the folder does not say
 * @throws InputError where the file is no STL
 * Cost: O(f log f)
 */
export function checkNegative(
  bytes: Uint8Array,
  unit: number,
  notes: NegativeNotes,
  network: NetworkTable | null,
  cap: number,
): { tallies: Tally[]; unread: Map<Tally, string> } {
  const unread = new Map<Tally, string>();
  const make = (head: Omit<TallyHead, 'cap' | 'nameOf'> & Partial<Pick<TallyHead, 'nameOf'>>): Tally =>
    new Tally({ nameOf: (face) => (face < 0 ? 'negative' : `negative:${face}`), ...head, cap });
  const closed = make({
    id: 'negative-closed',
    title: 'every edge of the negative has two triangles, oriented alike',
    sense: 'at-most',
    limit: 0,
    unit: '1',
    describe: () => 'an edge of the triangle is open, has more than two triangles, or is oriented both ways',
  });
  const whole = make({
    id: 'negative-whole',
    title: 'the negative is one solid, its normals out of it',
    sense: 'at-most',
    limit: 0,
    unit: '1',
    describe: (value) => (value > 0 ? `${value} surfaces more than one` : 'the surface is inside out'),
  });
  const volume = make({
    id: 'negative-volume',
    title: 'the negative has the volume that mesh.json states',
    sense: 'at-most',
    limit: VOLUME_OFF,
    unit: '1',
    describe: (value) => `volume off by ${Number((100 * value).toPrecision(3))} %`,
  });
  const walls = make({
    id: 'negative-walls',
    title: 'no wall between channels is thinner than stated and asked',
    sense: 'at-least',
    limit: Math.max(Number.isNaN(notes.between) ? 0 : notes.between, Number.isNaN(notes.asked) ? 0 : notes.asked),
    unit: 'm',
    tolerance: WALL_OFF,
    nameOf: (row) => `segment ${network?.name[row] ?? row}`,
    describe: (value, _, other) =>
      `the wall to segment ${network?.name[other] ?? other} is ${Number((1e6 * value).toPrecision(4))} µm thick`,
  });
  const solids = readSolids('negative.stl', bytes, ['negative']);
  const mesh = weldCorners({ ...solids, corner: solids.corner.map((x) => x * unit) });
  const edges = listEdges(mesh);
  for (let e = 0; e < edges.count; e++) {
    const from = edges.sideStart[e]!;
    const first = edges.side[from]!;
    const two = edges.sideStart[e + 1]! - from === 2;
    const alike = two && mesh.triangle[first] !== mesh.triangle[edges.side[from + 1]!];
    closed.see(alike ? 0 : 1, Math.floor(first / 3));
  }
  const parts = measureComponents(mesh, edges);
  const total = parts.volume.reduce((sum, one) => sum + one, 0);
  whole.see(parts.count - 1, -1);
  if (!(total > 0)) whole.fail('negative', -1, -1, 0, 'the surface is inside out');
  if (Number.isNaN(notes.solid)) unread.set(volume, 'mesh.json states no volume');
  else volume.see(Math.abs(total / notes.solid - 1), -1);
  if (network === null) unread.set(walls, 'no network.csv');
  else if (notes.extended) unread.set(walls, 'network.csv has caps that were drawn out, the negative has not');
  else measureWalls(network, walls);
  return { tallies: [closed, whole, volume, walls], unread };
}

/** Sees the wall between each pair of segments that lie near and share no node, once. */
function measureWalls(network: NetworkTable, tally: Tally): void {
  const { count, end, radius, from, to } = network;
  // Segment k runs between the places 2k and 2k + 1.
  const tree = buildBoxTree(count, (k, out) => {
    for (let axis = 0; axis < 3; axis++) {
      const [a, b] = [end[6 * k + axis]!, end[6 * k + 3 + axis]!];
      out[axis] = Math.min(a, b) - radius[k]!;
      out[3 + axis] = Math.max(a, b) + radius[k]!;
    }
  });
  const reach = tally.head.limit + WALL_OFF;
  tally.checked += count;
  visitNearLeaves(tree, { margin: reach }, (one, second) => {
    for (let a = FAN * one; a < Math.min(FAN * one + FAN, count); a++) {
      for (let b = Math.max(FAN * second, a + 1); b < Math.min(FAN * second + FAN, count); b++) {
        const k = tree.item[a]!;
        const other = tree.item[b]!;
        if (from[k] === from[other] || from[k] === to[other] || to[k] === from[other] || to[k] === to[other]) continue;
        const wall = segmentToSegment(end, 2 * k, 2 * k + 1, 2 * other, 2 * other + 1) - radius[k]! - radius[other]!;
        if (wall <= reach) tally.see(wall, Math.min(k, other), Math.max(k, other));
      }
    }
  });
}

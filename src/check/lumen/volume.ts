import { InputError } from '../../core/errors.ts';
import { Tally, type TallyHead } from '../result.ts';
import { cornersOf, lookAtBoundary, lookAtCaps, type VolumeContext } from './volume-boundary.ts';
import { findOuterFaces, type OuterFaces } from './volume-faces.ts';
import { readVolume, type VolumeCells } from './volume-file.ts';
import { lookAtSections } from './volume-flux.ts';

/** Share of the flow that fluxes may be off by, at 24 segments and more. */
const FLUX_OFF = 0.005;

/**
 * Looks at `lumen_volume.vtu`: its cells, how they fit each other and the surface, and the flow in them.
 *
 * Its wall must be that of `lumen.stl`, triangle by triangle. Caps must be filled flat, by faces of any kind: layers of
 * cells along the wall end there in faces that would be too thin for the surface.
 *
 * Cost: O(cells)
 */
export function checkVolume(
  bytes: Uint8Array,
  context: VolumeContext,
  cap: number,
): { tallies: Tally[]; unread: Map<Tally, string> } {
  const tallies = createTallies(context, cap);
  const unread = new Map<Tally, string>();
  const all: Tally[] = Object.values(tallies);
  let volume: VolumeCells;
  try {
    volume = readVolume('lumen_volume.vtu', bytes);
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    for (const { where, message } of error.faults) tallies.cells.fail(where, -1, 0, 0, message);
    for (const tally of all) if (tally !== tallies.cells) unread.set(tally, 'lumen_volume.vtu cannot be read');
    return { tallies: all, unread };
  }
  if (volume.unit !== context.unitName) {
    const message = `unit of length: got ${volume.unit ?? 'none'}, mesh.json says ${context.unitName}`;
    tallies.boundary.fail('lumen_volume.vtu', -1, 1, 0, message);
  }
  for (let c = 0; c < volume.cells; c++) tallies.cells.see(leastCorner(volume, c), c);
  const outer = findOuterFaces(volume, (cell) => tallies.fit.see(1, cell));
  tallies.fit.checked = volume.cells;
  const capOf = lookAtBoundary(volume, outer, context, tallies.boundary);
  const unit = context.unit;
  tallies.whole.see(Math.abs((enclosed(volume, outer) * unit * unit * unit) / context.volume - 1), -1);
  lookAtWall(volume, outer, capOf, tallies.still);
  lookAtCaps(volume, outer, capOf, context, tallies.caps);
  if (context.network === null) unread.set(tallies.sections, 'no network.csv');
  else lookAtSections(volume, unit, context.network, tallies.sections);
  return { tallies: all, unread };
}

type VolumeTallies = Readonly<Record<'cells' | 'fit' | 'boundary' | 'whole' | 'still' | 'caps' | 'sections', Tally>>;

function createTallies({ around, boundary, network, slack, area, volume }: VolumeContext, cap: number): VolumeTallies {
  const nameOf = (row: number) => (row < 0 ? 'lumen_volume.vtu' : `lumen_volume.vtu:${row}`);
  const make = (head: Omit<TallyHead, 'cap' | 'nameOf' | 'unit'> & Partial<Pick<TallyHead, 'nameOf'>>): Tally =>
    new Tally({ nameOf, unit: '1', ...head, cap });
  const percent = (value: number) => `${Number((100 * value).toPrecision(3))} %`;
  const most = { sense: 'at-most', limit: 0 } as const;
  // Faces cut the vessel's parabola; how badly goes with the square of their length.
  const coarse = around < 24 ? (24 * 24) / (around * around) : 1;
  const flux = { sense: 'at-most', limit: FLUX_OFF * coarse } as const;
  return {
    cells: make({
      id: 'volume-cells',
      title: 'no cell of the volume is turned over or flat at a corner',
      sense: 'at-least',
      limit: 1e-6,
      describe: (value) => `least scaled Jacobian ${Number(value.toPrecision(3))}, wanted more than 0`,
    }),
    fit: make({
      ...most,
      id: 'volume-fit',
      title: 'cells of the volume share whole faces, two by two',
      describe: () => 'a face of the cell has more than two cells, or two on the same side, or is cut otherwise',
    }),
    boundary: make({
      ...most,
      id: 'volume-boundary',
      title: 'the volume ends at the wall triangles of lumen.stl and at its caps',
      describe: (value) => `the faces at the cap have an area off by ${percent(value)}`,
    }),
    whole: make({
      sense: 'at-most',
      // Corners of the surface are rounded where they are printed.
      limit: Math.max(1e-6, (slack * area) / volume),
      id: 'volume-whole',
      title: 'the volume is as large as what lumen.stl encloses',
      describe: (value) => `off by ${percent(value)}`,
    }),
    still: make({
      ...most,
      id: 'volume-still',
      title: 'the blood of the volume stands still at the wall',
      nameOf: (row) => `point ${row} of lumen_volume.vtu`,
      describe: (value) => `speed ${Number(value.toPrecision(3))} of the fastest`,
    }),
    caps: make({
      sense: 'at-most',
      limit: FLUX_OFF,
      id: 'volume-caps',
      title: 'the volume carries the flows of boundary.csv through the caps',
      nameOf: (row) => boundary.name[row] ?? `row ${row}`,
      describe: (value) => `flux off by ${percent(value)}`,
    }),
    sections: make({
      ...flux,
      id: 'volume-sections',
      title: 'the volume carries the flows of network.csv through ten vessels of each tree',
      nameOf: (row) => `segment ${network?.name[row] ?? row}`,
      describe: (value) => `flux halfway along off by ${percent(value)}`,
    }),
  };
}

/** Least volume that three edges span at a corner of a cell, over that of a cube of their lengths. */
function leastCorner({ position, corner, start, kind }: VolumeCells, cell: number): number {
  let least = Infinity;
  for (const [o, a, b, c] of kind[cell]!.edges) {
    const at = (k: number): number => 3 * corner[start[cell]! + k]!;
    const edge = (k: number): [number, number, number] => [
      position[at(k)]! - position[at(o)]!,
      position[at(k) + 1]! - position[at(o) + 1]!,
      position[at(k) + 2]! - position[at(o) + 2]!,
    ];
    const [[ux, uy, uz], [vx, vy, vz], [wx, wy, wz]] = [edge(a), edge(b), edge(c)];
    const spanned = (uy * vz - uz * vy) * wx + (uz * vx - ux * vz) * wy + (ux * vy - uy * vx) * wz;
    const lengths = Math.hypot(ux, uy, uz) * Math.hypot(vx, vy, vz) * Math.hypot(wx, wy, wz);
    const value = lengths > 0 ? spanned / lengths : 0;
    if (!(value >= least)) least = value;
  }
  return least;
}

/** Six times the volume that outer faces enclose; quadrilaterals as the mean of their two cuts. */
function enclosed({ position: p, points }: VolumeCells, { count, corner }: OuterFaces): number {
  const [ox, oy, oz] = points > 0 ? [p[0]!, p[1]!, p[2]!] : [0, 0, 0];
  const six = (a: number, b: number, c: number): number => {
    const [ax, ay, az] = [p[3 * a]! - ox, p[3 * a + 1]! - oy, p[3 * a + 2]! - oz];
    const [bx, by, bz] = [p[3 * b]! - ox, p[3 * b + 1]! - oy, p[3 * b + 2]! - oz];
    const [cx, cy, cz] = [p[3 * c]! - ox, p[3 * c + 1]! - oy, p[3 * c + 2]! - oz];
    return (ay * bz - az * by) * cx + (az * bx - ax * bz) * cy + (ax * by - ay * bx) * cz;
  };
  let sum = 0;
  for (let f = 0; f < count; f++) {
    const [a, b, c, d] = [corner[4 * f]!, corner[4 * f + 1]!, corner[4 * f + 2]!, corner[4 * f + 3]!];
    if (d < 0) sum += six(a, b, c);
    else sum += 0.5 * (six(a, b, c) + six(a, c, d) + six(a, b, d) + six(b, c, d));
  }
  return sum / 6;
}

function lookAtWall(volume: VolumeCells, outer: OuterFaces, capOf: Int32Array, tally: Tally): void {
  const speed = (v: number): number =>
    Math.hypot(volume.velocity[3 * v]!, volume.velocity[3 * v + 1]!, volume.velocity[3 * v + 2]!);
  let fastest = 0;
  for (let v = 0; v < volume.points; v++) fastest = Math.max(fastest, speed(v));
  const seen = new Uint8Array(volume.points);
  for (let f = 0; f < outer.count; f++) {
    if (capOf[f]! >= 0) continue;
    for (const v of cornersOf(outer, f)) {
      if (seen[v] === 1) continue;
      seen[v] = 1;
      tally.see(fastest > 0 ? speed(v) / fastest : 1, v);
    }
  }
}

import { expect, it } from 'vitest';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { encodeMeshFolder } from '../../../../src/formats/mesh/mesh-folder.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { forkSketch, sketchForest } from '../../../support/lumen-forests.ts';

const VISCOSITY = 3.5e-3;
const sketch = forkSketch(40, 30, 0.8, 0.6);
const forest = sketchForest(sketch);
const field = solveFlow(forest, ['supply'], { rootPressures: [8000], viscosity: VISCOSITY, density: 1060 });
const mesh = buildLumen(forest);

function write(unit: 'm' | 'mm'): Map<string, Uint8Array> {
  const input = { mesh, forest, field, kinds: ['supply'], density: 1060, viscosity: VISCOSITY, unit } as const;
  return new Map(encodeMeshFolder(input).map((file) => [file.name, file.bytes]));
}
const metres = write('m');

/** The data of an array of a .vtp of appended raw data, read by hand. */
function arrayOf(files: Map<string, Uint8Array>, name: string): ArrayBuffer {
  const bytes = files.get('lumen.vtp')!;
  const head = new TextDecoder('latin1').decode(bytes);
  const offset = Number(new RegExp(`Name="${name}"[^>]* offset="(\\d+)"`).exec(head)![1]);
  const from = head.indexOf('_', head.indexOf('<AppendedData')) + 1 + offset;
  const size = Number(new DataView(bytes.buffer, bytes.byteOffset).getBigUint64(from, true));
  return bytes.slice(from + 8, from + 8 + size).buffer as ArrayBuffer;
}

interface Tube {
  readonly vessel: number;
  readonly row: number;
  readonly radius: number;
  /** Place along the axis, 0 to 1, and distance from it in m. */
  readonly place: (p: readonly number[]) => { readonly along: number; readonly far: number };
  /** m */
  readonly length: number;
}

/** Vessels by number: in a forest of one tree the vessel that ends at row i is number i − 1. */
const tubes: Tube[] = [1, 2, 3].map((row) => {
  const at = (r: number) => [0, 1, 2].map((k) => forest.position[3 * r + k]!);
  const from = at(forest.parent[row]!);
  const way = at(row).map((x, k) => x - from[k]!);
  const length = Math.hypot(...way);
  const place = (p: readonly number[]) => {
    const off = p.map((x, k) => x - from[k]!);
    const along = off.reduce((sum, x, k) => sum + x * way[k]!, 0) / (length * length);
    const held = Math.min(1, Math.max(0, along));
    return { along, far: Math.hypot(...off.map((x, k) => x - held * way[k]!)) };
  };
  return { vessel: row - 1, row, radius: forest.radius[row]!, place, length };
});

/** The tube on whose plain wall a point lies: one radius from its axis, clear of the junction; else null. */
function plainTube(p: readonly number[]): { tube: Tube; along: number } | null {
  const places = tubes.map((tube) => ({ tube, ...tube.place(p) }));
  const { tube, along, far } = places.reduce((best, one) => (one.far < best.far ? one : best));
  if (Math.hypot(...p) < 2.2e-3 || Math.abs(far / tube.radius - 1) > 0.06) return null;
  return { tube, along };
}

it('tells the vessel, pressure and wall shear of the network on plain tubes', () => {
  const points = new Float64Array(arrayOf(metres, 'Points'));
  const corners = new Int32Array(arrayOf(metres, 'connectivity'));
  const vessel = new Int32Array(arrayOf(metres, 'vessel'));
  const pressure = new Float64Array(arrayOf(metres, 'pressure_Pa'));
  const shear = new Float64Array(arrayOf(metres, 'wall_shear_Pa'));
  const at = (v: number) => [...points.subarray(3 * v, 3 * v + 3)];
  const seen = tubes.map(() => 0);
  for (let f = 0; f < vessel.length; f++) {
    const three = [0, 1, 2].map((k) => at(corners[3 * f + k]!));
    const middle = [0, 1, 2].map((k) => (three[0]![k]! + three[1]![k]! + three[2]![k]!) / 3);
    const plain = plainTube(middle);
    if (plain === null) continue;
    seen[plain.tube.vessel]!++;
    expect(vessel[f], `triangle ${f} at ${middle}`).toBe(plain.tube.vessel);
  }
  for (const count of seen) expect(count).toBeGreaterThan(100);
  let looked = 0;
  for (let v = 0; v < pressure.length; v++) {
    const plain = plainTube(at(v));
    if (plain === null) continue;
    looked++;
    const { tube, along } = plain;
    const r = tube.radius;
    const flow = forest.flow[tube.row]!;
    // Hagen–Poiseuille: the drop is 8μLQ/(πr⁴), linear along the tube; the shear at the wall is 4μQ/(πr³).
    const drop = (8 * VISCOSITY * tube.length * flow) / (Math.PI * r * r * r * r);
    const above = field.pressure[forest.parent[tube.row]!]!;
    expect(Math.abs(pressure[v]! - (above - along * drop)) / drop, `point ${v}`).toBeLessThan(1e-6);
    expect(shear[v]! / ((4 * VISCOSITY * flow) / (Math.PI * r * r * r)), `point ${v}`).toBeCloseTo(1, 9);
  }
  expect(looked).toBeGreaterThan(300);
});

/** All coordinates of a surface file in the file's order. */
function coordinates(files: Map<string, Uint8Array>, name: string): number[] {
  if (name === 'lumen.vtp') return [...new Float64Array(arrayOf(files, 'Points'))];
  const text = new TextDecoder().decode(files.get(name));
  if (name.endsWith('.stl'))
    return [...text.matchAll(/vertex (.*)/g)].flatMap((found) => found[1]!.split(' ').map(Number));
  const nodes = /\$Nodes\n\d+\n([\s\S]*?)\$EndNodes/.exec(text)![1]!.trim().split('\n');
  return nodes.flatMap((line) => line.split(' ').slice(1).map(Number));
}

it.each(['lumen.stl', 'lumen_one_solid.stl', 'lumen.vtp', 'lumen.msh'])('%s in mm is 1000 times that in m', (name) => {
  const metre = coordinates(metres, name);
  const milli = coordinates(write('mm'), name);
  expect(milli.length).toBe(metre.length);
  expect(metre.length).toBeGreaterThan(1000);
  // Scaling rounds once: half a unit in the last place.
  const off = milli.filter((x, k) => Math.abs(x - 1000 * metre[k]!) > 2 * Number.EPSILON * Math.abs(x));
  expect(off).toEqual([]);
});

import { spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { VTP } from '../../src/formats/tree/vtp.ts';
import { VTU } from '../../src/formats/tree/vtu.ts';
import type { TreeRecord } from '../../src/tree/forest.ts';

/*
 * Trees of the built program, opened by readers that know nothing of this project: VTK, meshio, Python's csv and json,
 * and an SWC parser of a few lines. What they find is held against what our own decoder makes of tree.vtp.
 */

const MAIN = new URL('../../dist/cli/main.js', import.meta.url).pathname;
const SCRIPT = new URL('read-tree.py', import.meta.url).pathname;
/** Debian's, which has Debian's modules, whatever other python3 comes first on the path. */
const PYTHON = '/usr/bin/python3';
const CASES = [
  ['explicit-points', null],
  ['gel-block', '150'],
  ['hollow-wall', '60'],
] as const;
/** Lengths of tree names to try, since they move all data in a file. */
const NAME_LENGTHS = Array.from({ length: 16 }, (_, k) => k + 1);

interface Column {
  readonly count: number;
  readonly min: number;
  readonly max: number;
  readonly first: number;
  readonly last: number;
  readonly type?: string;
}
type Columns = Readonly<Record<string, Column>>;
interface Grid {
  readonly errors?: readonly string[];
  readonly points: number;
  readonly cells: number;
  readonly cellTypes: Readonly<Record<string, unknown>>;
  readonly pointType: string;
  readonly position: Columns;
  readonly length: number;
  readonly cellData: Columns;
  readonly pointData: Columns;
  readonly fieldData: Readonly<Record<string, unknown>>;
}
interface Found {
  readonly versions: Readonly<Record<string, string>>;
  readonly vtkOfVtp: Grid;
  readonly vtkOfVtu: Grid;
  readonly meshioOfVtu: Grid;
  readonly meshioOfNamed: readonly Grid[];
  readonly swc: {
    readonly points: number;
    readonly cells: number;
    readonly types: readonly number[];
    readonly position: Columns;
    readonly length: number;
    readonly radius: Column;
  };
  readonly nodesCsv: Columns;
  readonly vesselsCsv: Columns & { readonly tree_name: readonly string[]; readonly kind: readonly string[] };
  readonly json: {
    readonly trees: unknown;
    readonly provenance: string;
    readonly nodes: Columns;
    readonly vessels: Columns;
  };
}

function describeColumn(values: ArrayLike<number>): Column {
  const list = Array.from(values);
  const by = (better: (a: number, b: number) => boolean) => list.reduce((a, b) => (better(b, a) ? b : a));
  return {
    count: list.length,
    min: by((a, b) => a < b),
    max: by((a, b) => a > b),
    first: list[0]!,
    last: list.at(-1)!,
  };
}

/** What our decoder says of a tree, under the names that the files are documented to use. */
function describeRecord({ forest, field, order }: TreeRecord) {
  const rows = Array.from({ length: forest.count }, (_, i) => i);
  const vessels = rows.filter((i) => forest.parent[i]! >= 0);
  const solved = field!;
  const ofNodes = (values: ArrayLike<number>) => describeColumn(values);
  const ofVessels = (values: ArrayLike<number>) => describeColumn(vessels.map((i) => values[i]!));
  const axis = (k: number) => rows.map((i) => forest.position[3 * i + k]!);
  let length = 0;
  for (const i of vessels) {
    const at = (row: number) => [0, 1, 2].map((k) => forest.position[3 * row + k]!);
    const [a, b] = [at(forest.parent[i]!), at(i)];
    length += Math.hypot(a[0]! - b[0]!, a[1]! - b[1]!, a[2]! - b[2]!);
  }
  return {
    points: rows.length,
    cells: vessels.length,
    length,
    axes: [0, 1, 2].map((k) => ofNodes(axis(k))),
    ends: { from: ofVessels(forest.parent), to: ofVessels(rows) },
    cellReals: {
      radius_m: ofVessels(forest.radius),
      flow_m3_s: ofVessels(forest.flow),
      viscosity_Pa_s: ofVessels(solved.viscosity),
      velocity_m_s: ofVessels(solved.velocity),
      wall_shear_Pa: ofVessels(solved.wallShear),
      reynolds: ofVessels(solved.reynolds),
      haematocrit: ofVessels(solved.haematocrit),
    },
    cellWholes: { tree: ofVessels(forest.tree), order: ofVessels(order) },
    pointReals: { pressure_Pa: ofNodes(solved.pressure), transit_s: ofNodes(solved.transit) },
    treeOfNodes: ofNodes(forest.tree),
  };
}

function typed(columns: Readonly<Record<string, Column>>, type: string): Columns {
  return Object.fromEntries(Object.entries(columns).map(([name, column]) => [name, { type, ...column }]));
}

function run(command: string, argv: readonly string[]): string {
  const done = spawnSync(command, argv, { encoding: 'utf8', maxBuffer: 1 << 28 });
  if (done.error !== undefined) {
    const cure = command === PYTHON ? ': install the Debian package python3' : '';
    throw new Error(`${command} does not run (${done.error.message})${cure}`);
  }
  if (done.status !== 0) throw new Error(`${command} ${argv.join(' ')} ended with ${done.status}:\n${done.stderr}`);
  return done.stdout;
}

interface Reading {
  readonly record: TreeRecord;
  readonly want: ReturnType<typeof describeRecord>;
  readonly found: Found;
}

/** Grows and exports a tree by the built program and has the other readers open it. */
function readRun(folder: string, preset: string, terminals: string | null): Reading {
  if (!existsSync(MAIN)) throw new Error(`${MAIN} is missing: run npm run build first`);
  const count = terminals === null ? [] : ['--terminals', terminals];
  run(process.execPath, [MAIN, 'grow', preset, ...count, '--out', folder, '--quiet']);
  for (const extension of ['vtu', 'csv', 'swc', 'json']) {
    run(process.execPath, [MAIN, 'export', folder, '--to', join(folder, `tree.${extension}`), '--quiet']);
  }
  const bytes = new Uint8Array(readFileSync(join(folder, 'tree.vtp')));
  const { record } = VTP.decode([{ name: 'tree.vtp', bytes }]);
  for (const length of NAME_LENGTHS) {
    const [file] = VTU.encode({ ...record, names: namesOfLength(record, length) });
    writeFileSync(join(folder, `named-${String(length).padStart(2, '0')}.vtu`), file!.bytes);
  }
  return { record, want: describeRecord(record), found: JSON.parse(run(PYTHON, [SCRIPT, folder])) };
}

/** A name of a length a tree: aaa, bbb, … */
function namesOfLength(record: TreeRecord, length: number): string[] {
  return record.names.map((_, t) => String.fromCharCode(97 + t).repeat(length));
}

/** What `make` gives or throws, made the first time it is asked for. */
function once<T>(make: () => T): () => T {
  let answer: () => T = () => {
    try {
      const value = make();
      answer = () => value;
    } catch (error) {
      answer = () => {
        throw error;
      };
    }
    return answer();
  };
  return () => answer();
}

describe('other readers', () => {
  const scratch = mkdtempSync(join(tmpdir(), 'readers-'));
  afterAll(() => rmSync(scratch, { recursive: true, force: true }));

  it('say which Debian packages to install when modules are missing', () => {
    // -S leaves out the folders that hold installed modules.
    const done = spawnSync(PYTHON, ['-I', '-S', SCRIPT, scratch], { encoding: 'utf8' });
    expect(done.error).toBeUndefined();
    expect(done.status).toBe(1);
    for (const [name, debian] of [
      ['vtk', 'python3-vtk9'],
      ['meshio', 'python3-meshio'],
    ]) {
      expect(done.stderr).toMatch(
        new RegExp(`no python module ${name} .*: install the Debian package ${debian}$`, 'm'),
      );
    }
  });

  describe.each(CASES)('of %s', (preset, terminals) => {
    // Made by the first test that asks, so that what goes wrong fails tests and skips none.
    const reading = once(() => readRun(join(scratch, preset), preset, terminals));

    /** Points, cells, arrays by name and type, and range of each. */
    const expectGrid = (grid: Grid, { want }: Reading, real: string, whole: string): void => {
      expect(grid.points).toBe(want.points);
      expect(grid.cells).toBe(want.cells);
      expect(grid.pointType).toBe(real);
      expect(grid.position).toEqual({ x: want.axes[0], y: want.axes[1], z: want.axes[2] });
      expect(Math.abs(grid.length / want.length - 1)).toBeLessThan(1e-12);
      expect(grid.cellData).toEqual({ ...typed(want.cellReals, real), ...typed(want.cellWholes, whole) });
      expect(grid.pointData).toEqual(typed(want.pointReals, real));
    };
    const texts = ({ record }: Reading, names = record.names) => ({
      format_version: [1],
      tree_names: names,
      tree_kinds: record.kinds,
      provenance: [record.provenance],
    });

    it('is a tree with something to read', () => {
      const { record, want } = reading();
      expect(want.cells).toBeGreaterThan(20);
      expect(record.field).not.toBeNull();
      expect(record.provenance).toContain('"seed"');
      expect(want.cellReals.radius_m.max).toBeGreaterThan(want.cellReals.radius_m.min);
    });

    it('VTK reads .vtp and .vtu', () => {
      const { found, want } = reading();
      for (const grid of [found.vtkOfVtp, found.vtkOfVtu]) {
        expect(grid.errors).toEqual([]);
        expectGrid(grid, reading(), 'double', 'int');
        expect(grid.cellTypes).toEqual({ 'vtkLine of 2': want.cells });
        expect(grid.fieldData).toEqual(texts(reading()));
      }
    });

    it('meshio reads .vtu', () => {
      const { found, want } = reading();
      expectGrid(found.meshioOfVtu, reading(), 'float64', 'int32');
      expect(found.meshioOfVtu.cellTypes).toEqual({ line: [want.cells, 2] });
      expect(found.meshioOfVtu.fieldData).toEqual(texts(reading()));
    });

    it('meshio reads .vtu whatever the names', () => {
      const { found, record } = reading();
      expect(found.meshioOfNamed).toHaveLength(NAME_LENGTHS.length);
      for (const [k, grid] of found.meshioOfNamed.entries()) {
        expectGrid(grid, reading(), 'float64', 'int32');
        expect(grid.fieldData).toEqual(texts(reading(), namesOfLength(record, NAME_LENGTHS[k]!)));
      }
    });

    it('a parser of the standard reads .swc, in micrometres', () => {
      const { found, want } = reading();
      const near = (got: Column, metres: Column) => {
        expect(got.count).toBe(metres.count);
        for (const key of ['min', 'max', 'first', 'last'] as const) {
          expect(Math.abs(got[key] - 1e6 * metres[key])).toBeLessThanOrEqual(1e-15 * Math.abs(1e6 * metres[key]));
        }
      };
      expect(found.swc.points).toBe(want.points);
      expect(found.swc.cells).toBe(want.cells);
      expect(found.swc.types).toEqual([0]);
      near(found.swc.position.x!, want.axes[0]!);
      near(found.swc.position.y!, want.axes[1]!);
      near(found.swc.position.z!, want.axes[2]!);
      near(found.swc.radius, want.cellReals.radius_m);
      expect(Math.abs(found.swc.length / (1e6 * want.length) - 1)).toBeLessThan(1e-12);
    });

    it('Python reads .csv and .json', () => {
      const { found, record, want } = reading();
      const [x_m, y_m, z_m] = want.axes;
      const numbers = (count: number) => describeColumn(Array.from({ length: count }, (_, i) => i));
      const nodes = { x_m, y_m, z_m, ...want.pointReals };
      const vessels = { ...want.ends, ...want.cellReals, ...want.cellWholes };
      expect(found.nodesCsv).toEqual({ node: numbers(want.points), tree: want.treeOfNodes, ...nodes });
      const { tree_name, kind, ...columns } = found.vesselsCsv;
      expect(columns).toEqual({ vessel: numbers(want.cells), ...vessels });
      expect(tree_name).toEqual(record.names.slice().sort());
      expect(kind).toEqual([...new Set(record.kinds)].sort());
      expect(found.json).toEqual({
        trees: record.names.map((name, t) => ({ name, kind: record.kinds[t] })),
        provenance: record.provenance,
        nodes,
        vessels,
      });
    });
  });
});

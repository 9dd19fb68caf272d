import { copyFileSync, existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { VERSION } from '../../src/index.ts';
import { soundSpec } from '../support/bend-spec.ts';
import { makeScratch, runCli, type Scratch, tinySpec } from '../support/run-cli.ts';
import { plyBinary, stlBinary } from '../support/surface-files.ts';
import { cube, moved } from '../support/surfaces.ts';

let scratch: Scratch;
let spec: string;
beforeAll(() => {
  scratch = makeScratch();
  spec = scratch.path('spec.json');
  writeFileSync(spec, tinySpec());
});
afterAll(() => scratch.remove());

const bytes = (...names: string[]) => readFileSync(scratch.path(...names));

/** The spec with a cube of 12 mm for its tissue, from a surface file. */
function surfaceSpec(file: string): string {
  const value = soundSpec();
  value.tissue = { shape: 'surface', file, unit: 'mm' };
  value.trees[0].terminals.count = 8;
  return JSON.stringify(value);
}
const block = moved(cube(), ([x, y, z]) => [12 * x, 12 * y, 12 * z]);

describe('grow', () => {
  test('writes a run folder, says where it is and how many terminals were served, exit 0', async () => {
    const run = scratch.path('run');
    const { code, out, err } = await runCli(['grow', spec, '--out', run]);
    expect({ code, err }).toEqual({ code: 0, err: '' });
    expect(out).toContain('12 of 12 terminals served');
    expect(out).toMatch(/% of the tissue/);
    expect(out).toMatch(/power: \S+ .?W/);
    expect(out).toMatch(/promises: \d+ held, 0 broken/);
    expect(out).toContain(`look at it: vesselwright view ${run}`);
    expect(out).toContain('describe no patient');
    for (const name of ['tree.vtp', 'spec.json', 'report.json', 'report.html']) {
      expect(existsSync(scratch.path('run', name)), name).toBe(true);
      expect(out).toMatch(new RegExp(`written: ${run}/: .*${name}`));
    }
    expect(scratch.names()).toEqual(['run', 'spec.json']);
  });

  test('spec.json states the version, every default, and is what tree.vtp carries', async () => {
    await runCli(['grow', spec, '--out', scratch.path('stated')]);
    const text = bytes('stated', 'spec.json').toString();
    const value = JSON.parse(text);
    expect(value.version).toBe(VERSION);
    expect(value.blood.density_kg_m3).toBe(1060);
    expect(value.sizing.maintenance_W_m3).toBeGreaterThan(0);
    const tree = bytes('stated', 'tree.vtp').toString('latin1');
    expect(tree).not.toContain('time_s');
    const escaped = Buffer.from(text).toString('latin1');
    expect(tree.includes(escaped)).toBe(true);
  });

  test('the same spec and seed give the same bytes, and so does spec.json of the run; another seed does not', async () => {
    for (const name of ['one', 'two']) await runCli(['grow', spec, '--out', scratch.path(name)]);
    await runCli(['grow', scratch.path('one', 'spec.json'), '--out', scratch.path('three')]);
    await runCli(['grow', spec, '--seed', 'other', '--out', scratch.path('four')]);
    expect(bytes('two', 'tree.vtp').equals(bytes('one', 'tree.vtp'))).toBe(true);
    expect(bytes('three', 'tree.vtp').equals(bytes('one', 'tree.vtp'))).toBe(true);
    expect(bytes('three', 'spec.json').equals(bytes('one', 'spec.json'))).toBe(true);
    expect(bytes('four', 'tree.vtp').equals(bytes('one', 'tree.vtp'))).toBe(false);
    const reports = ['one', 'two'].map((name) => JSON.parse(bytes(name, 'report.json').toString()));
    expect(reports[0].resources.wall_time_s).toBeGreaterThan(0);
    expect(reports[0].resources.peak_memory_bytes).toBeGreaterThan(1e6);
    for (const report of reports) delete report.resources;
    expect(reports[1]).toEqual(reports[0]);
  });

  test.each(['explicit points', 'a count'])(
    'a budget in seconds becomes sweeps that grow the same tree of %s',
    async (kind) => {
      const value = soundSpec();
      value.sizing = { rule: 'least-power' };
      const points = [2, 4, 6, 8].flatMap((x) => [2, 6, 10].map((y) => [x, y, 3]));
      value.trees[0].terminals =
        kind === 'a count' ? { count: 30 } : { points_mm: points.map(([x, y, z]) => [x! + 2, y, z]) };
      const timed = scratch.path(`${kind}.json`);
      writeFileSync(timed, JSON.stringify(value));
      expect((await runCli(['grow', timed, '--refine', '0.02s', '--out', scratch.path(`${kind} 1`)])).code).toBe(0);
      expect(typeof JSON.parse(bytes(`${kind} 1`, 'spec.json').toString()).refine).toBe('number');
      await runCli(['grow', scratch.path(`${kind} 1`, 'spec.json'), '--out', scratch.path(`${kind} 2`)]);
      expect(bytes(`${kind} 2`, 'tree.vtp').equals(bytes(`${kind} 1`, 'tree.vtp'))).toBe(true);
    },
  );

  test('--terminals, --seed, --refine and --workers', async () => {
    const argv = ['--terminals', '7', '--seed', 's', '--refine', 'none', '--workers', '2'];
    const { code, out } = await runCli(['grow', spec, ...argv, '--out', scratch.path('options')]);
    expect(code).toBe(0);
    expect(out).toContain('seed s');
    expect(out).toContain('7 of 7 terminals');
    const value = JSON.parse(bytes('options', 'spec.json').toString());
    expect([value.trees[0].terminals.count, value.seed, value.refine]).toEqual([7, 's', 'none']);
  });

  test('a preset by name; a file of that name wins', async () => {
    const { code, out } = await runCli(['grow', 'gel-block', '--terminals', '9', '--out', scratch.path('preset')]);
    expect(code).toBe(0);
    expect(out).toContain('perfused gel block');
    const before = process.cwd();
    try {
      process.chdir(scratch.folder);
      copyFileSync(spec, scratch.path('gel-block'));
      expect((await runCli(['grow', 'gel-block', '--out', 'file-wins'])).out).toContain('sound, seed sound-1');
    } finally {
      process.chdir(before);
    }
  });

  test('a surface is copied beside the tree, and the run stands by itself', async () => {
    mkdirSync(scratch.path('shapes'));
    writeFileSync(scratch.path('shapes', 'block.stl'), stlBinary(block));
    writeFileSync(scratch.path('surface.json'), surfaceSpec('shapes/block.stl'));
    const run = scratch.path('surface');
    expect((await runCli(['grow', scratch.path('surface.json'), '--out', run])).code).toBe(0);
    expect(bytes('surface', 'block.stl').equals(bytes('shapes', 'block.stl'))).toBe(true);
    expect(JSON.parse(bytes('surface', 'spec.json').toString()).tissue.file).toBe('block.stl');
    await runCli(['grow', scratch.path('surface', 'spec.json'), '--out', scratch.path('surface again')]);
    expect(bytes('surface again', 'tree.vtp').equals(bytes('surface', 'tree.vtp'))).toBe(true);
    const { code, out } = await runCli(['check', run]);
    expect(code, out).toBe(0);
    expect(out).toMatch(/^held +containment/m);
    // In place, over the run that is read.
    expect((await runCli(['grow', scratch.path('surface', 'spec.json'), '--out', run])).code).toBe(0);
    expect(bytes('surface', 'tree.vtp').equals(bytes('surface again', 'tree.vtp'))).toBe(true);
  });

  test('two surfaces of one name are refused, the same one twice is not', async () => {
    for (const folder of ['a', 'b', 'c']) mkdirSync(scratch.path(folder));
    writeFileSync(scratch.path('a', 'block.ply'), plyBinary(block, true));
    writeFileSync(scratch.path('b', 'block.ply'), plyBinary(block, false));
    writeFileSync(scratch.path('c', 'block.ply'), plyBinary(block, true));
    const value = JSON.parse(surfaceSpec(''));
    const part = (file: string) => ({ shape: 'surface', file, unit: 'mm' });
    value.tissue = { shape: 'union', parts: [part('a/block.ply'), part('b/block.ply')] };
    writeFileSync(scratch.path('twins.json'), JSON.stringify(value));
    const { code, err } = await runCli(['grow', scratch.path('twins.json'), '--out', scratch.path('twins')]);
    expect(code).toBe(2);
    expect(err).toMatch(/^tissue\.parts\[1\]\.file: got b\/block\.ply, another file than a\/block\.ply/);
    expect(existsSync(scratch.path('twins'))).toBe(false);
    value.tissue.parts[1].file = 'c/block.ply';
    writeFileSync(scratch.path('twins.json'), JSON.stringify(value));
    expect((await runCli(['grow', scratch.path('twins.json'), '--out', scratch.path('twins')])).code).toBe(0);
  });

  test('what was asked and could not be done is said, exit 1, and the run is written', async () => {
    const value = soundSpec();
    // Two points 50 µm apart, where vessels must stay 900 µm apart.
    const points = [
      [6, 6, 3],
      [6, 6.05, 3],
      [9, 3, 3],
    ];
    value.trees[0].terminals = { points_mm: points, pressure_mmHg: 20 };
    value.clearance.gap_um = 900;
    writeFileSync(scratch.path('crowded.json'), JSON.stringify(value));
    const { code, out } = await runCli(['grow', scratch.path('crowded.json'), '--out', scratch.path('crowded')]);
    expect(code, out).toBe(1);
    expect(out).toMatch(/NOT MET: tree supply serves 2 of the 3 terminals/);
    expect(JSON.parse(bytes('crowded', 'report.json').toString()).notes[0]).toMatch(/serves 2 of the 3/);
  });

  test('--json prints one document and nothing else; --quiet nothing at all', async () => {
    const json = await runCli(['grow', spec, '--json', '--out', scratch.path('json')]);
    const value = JSON.parse(json.out);
    expect(value).toMatchObject({
      held: true,
      stopped: 'complete',
      trees: [{ name: 'supply', served: 12, asked: 12 }],
    });
    expect(value.promises.length).toBeGreaterThan(15);
    expect(value.caution).toMatch(/no patient/);
    const quiet = await runCli(['grow', spec, '--quiet', '--out', scratch.path('quiet')]);
    expect(quiet).toEqual({ code: 0, out: '', err: '' });
  });
});

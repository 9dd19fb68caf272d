import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { soundSpec } from '../support/bend-spec.ts';
import { makeScratch, runCli, type Scratch } from '../support/run-cli.ts';

let scratch: Scratch;
let run: string;
beforeAll(async () => {
  scratch = makeScratch();
  // A small drop makes wide vessels, so that a tree of few triangles comes out.
  const spec = soundSpec();
  spec.trees[0].inlet.pressure_mmHg = 20.2;
  spec.trees[0].terminals.count = 6;
  writeFileSync(scratch.path('spec.json'), JSON.stringify(spec));
  run = scratch.path('run');
  await runCli(['grow', scratch.path('spec.json'), '--out', run]);
});
afterAll(() => scratch.remove());

const FILES = [
  'boundary.csv',
  'lumen.msh',
  'lumen.stl',
  'lumen.vtp',
  'lumen_one_solid.stl',
  'mesh.json',
  'network.csv',
];
const text = (...names: string[]) => readFileSync(scratch.path(...names), 'utf8');

describe('mesh', () => {
  test('writes a mesh folder whose check holds: exit 0', async () => {
    const { code, out, err } = await runCli(['mesh', run, '--out', scratch.path('mesh')]);
    expect({ code, err }, out).toEqual({ code: 0, err: '' });
    for (const file of FILES) {
      expect(existsSync(scratch.path('mesh', file)), file).toBe(true);
      expect(out).toContain(file);
    }
    expect(text('mesh', 'lumen.stl').match(/^solid \w+$/gm)).toHaveLength(8);
    expect(text('mesh', 'lumen_one_solid.stl').match(/^solid \w+$/gm)).toHaveLength(1);
    const notes = JSON.parse(text('mesh', 'mesh.json'));
    expect(notes).toMatchObject({
      unit: 'm',
      around: 24,
      seed: 'sound-1',
      density_kg_m3: 1060,
      viscosity_Pa_s: 0.0035,
    });
    const check = await runCli(['check', scratch.path('mesh'), '--json']);
    expect(JSON.parse(check.out)).toMatchObject({ kind: 'mesh', held: true });
    expect(check.code).toBe(0);
  });

  test('--extend, --profile, --stretch and --solver-files: longer vessels, a table, input that names every cap', async () => {
    const words = ['--extend', '4', '--profile', 'parabolic', '--solver-files', 'gmsh,openfoam', '--stretch', '1.5'];
    const { code, out, err } = await runCli(['mesh', run, ...words, '--out', scratch.path('ready')]);
    expect({ code, err }, out).toEqual({ code: 0, err: '' });
    const notes = JSON.parse(text('ready', 'mesh.json'));
    expect(notes).toMatchObject({ axial_stretch: 1.5, inlet_profile: 'parabolic', extensions: { diameters: 4 } });
    const caps = text('ready', 'boundary.csv')
      .trim()
      .split('\n')
      .slice(1)
      .map((line) => line.split(','));
    for (const cap of caps) expect(notes.extensions.length_m[cap[0]!] / (8 * Number(cap[2]))).toBeCloseTo(1, 9);
    const plain = JSON.parse(text('mesh', 'mesh.json'));
    expect(plain).toMatchObject({ extensions: null, inlet_profile: null, axial_stretch: 1 });
    expect(text('ready', 'inlet_profile.csv')).toMatch(/^patch,x_m,y_m,z_m,vx_m_s,vy_m_s,vz_m_s\ninlet_0,/);
    for (const file of ['0/U', '0/p', 'system/controlDict'])
      for (const cap of caps) expect(text('ready', 'openfoam', file)).toContain(cap[0]!);
    expect(text('ready', 'fill.geo')).toContain('Merge "lumen.msh"');
    const check = await runCli(['check', scratch.path('ready'), '--json']);
    expect(JSON.parse(check.out)).toMatchObject({ held: true });
  });

  test('--negative writes the block less the lumen; a wall thinner than asked is told: exit 1', async () => {
    const argv = ['mesh', run, '--around', '12', '--negative', '--out', scratch.path('gel'), '--json'];
    const first = await runCli(argv);
    expect(first.code, first.out + first.err).toBe(0);
    const { negative } = JSON.parse(first.out);
    expect(negative.solid_m3).toBeCloseTo(negative.block_m3 - negative.channels_m3, 20);
    expect(negative.problems).toEqual([]);
    expect(text('gel', 'negative.stl')).toMatch(/^solid negative\n/);
    expect(text('gel', 'negative.stl').match(/^ {2}facet/gm)).toHaveLength(negative.triangles);
    expect(existsSync(scratch.path('gel', 'negative.3mf'))).toBe(true);
    expect(JSON.parse(text('gel', 'mesh.json')).negative).toEqual(negative);
    const least = 1e6 * Math.min(negative.least_wall_between_channels_m, negative.least_wall_to_surface_m);
    const second = await runCli([...argv, '--least-wall', String(2 * least)]);
    expect(second.code).toBe(1);
    expect(JSON.parse(second.out).negative.problems.length).toBeGreaterThan(0);
    const third = await runCli([...argv, '--least-wall', String(0.99 * least)]);
    expect(third.code).toBe(0);
  });

  test.each([
    [['--least-wall', '30'], /--least-wall: got it without --negative/],
    [['--negative', '--least-wall', '0'], /--least-wall: got "0", expected a number > 0/],
    [['--extend', '-1'], /--extend: got "-1", expected a number from 0 to 100/],
    [['--profile', 'round'], /--profile: got "round", expected one of flat, parabolic/],
    [['--solver-files', 'gmsh,none'], /--solver-files: got "none", expected one of gmsh, openfoam/],
    [['--stretch', '9'], /--stretch: got 9, expected 1 to 3.5/],
  ])('%j is refused: exit 2, nothing written', async (words, told) => {
    const { code, err } = await runCli(['mesh', run, ...words, '--out', scratch.path('refused')]);
    expect(code).toBe(2);
    expect(err).toMatch(told);
    expect(existsSync(scratch.path('refused'))).toBe(false);
  });

  test('--lengths effective: lower drops, said in every table, of a cut tree too', async () => {
    const column = (folder: string, name: string, patch: RegExp) => {
      const [head, ...rows] = text(folder, 'boundary.csv').trim().split('\n');
      const at = head!.split(',').indexOf(name);
      return rows.filter((row) => patch.test(row)).map((row) => row.split(',')[at]!);
    };
    for (const cut of [[], ['--keep-order', '2']]) {
      for (const lengths of ['axis', 'effective']) {
        const argv = ['mesh', run, ...cut, '--lengths', lengths, '--around', '12', '--out', scratch.path(lengths)];
        const { code, out, err } = await runCli(argv);
        expect({ code, err }, out).toEqual({ code: 0, err: '' });
        const { network } = JSON.parse(text(lengths, 'mesh.json'));
        expect(network.lengths).toBe(lengths);
        const inlet = Number(column(lengths, 'pressure_Pa', /^inlet/)[0]);
        const drops = column(lengths, 'pressure_Pa', /^outlet/).map((pressure) => inlet - Number(pressure));
        for (const [k, drop] of drops.entries()) {
          expect(drop / network.drops[k][`${lengths}_Pa`]).toBeCloseTo(1, 9);
          expect(network.drops[k].axis_Pa).toBeGreaterThan(network.drops[k].effective_Pa);
        }
      }
      expect(column('axis', 'drop_effective_Pa', /./)).toEqual(column('effective', 'drop_effective_Pa', /./));
      expect(column('axis', 'pressure_Pa', /^inlet/)).toEqual(column('effective', 'pressure_Pa', /^inlet/));
    }
    // What is behind a cut: its terminals' pressures are those of the network of the same lengths.
    const behind = (lengths: string) => column(lengths, 'resistance_Pa_s_m3', /^outlet/).map(Number);
    const [axis, effective] = [behind('axis'), behind('effective')];
    expect(axis.some((resistance) => resistance > 0)).toBe(true);
    for (const [k, resistance] of axis.entries()) {
      if (resistance > 0) expect(effective[k]).toBeLessThan(resistance);
    }
  });

  test('--unit, --around and --keep-above are told in mesh.json, and the mesh is checked in metres all the same', async () => {
    const argv = ['--unit', 'mm', '--around', '28', '--keep-order', '2', '--keep-above', '1', '--json'];
    const { code, out } = await runCli(['mesh', run, ...argv, '--out', scratch.path('coarse')]);
    const value = JSON.parse(out);
    expect(code, JSON.stringify(value.findings)).toBe(0);
    expect(value.removed).toBeGreaterThan(0);
    const notes = JSON.parse(text('coarse', 'mesh.json'));
    expect(notes).toMatchObject({ unit: 'mm', around: 28, cut_off: { keep_above_m: 1e-6, keep_order: 2 } });
    // The block is 12 mm wide: in millimetres some corner lies beyond 1.
    let reach = 0;
    for (const [, x] of text('coarse', 'lumen.stl').matchAll(/vertex (\S+)/g)) reach = Math.max(reach, Number(x));
    expect(reach).toBeGreaterThan(1);
    expect(reach).toBeLessThan(12);
    expect((await runCli(['check', scratch.path('coarse')])).code).toBe(0);
  });

  test('a tree without a spec but with a flow solution is meshed too', async () => {
    await runCli(['export', run, '--to', scratch.path('tree.csv')]);
    const { code } = await runCli(['mesh', scratch.path('tree.csv'), '--out', scratch.path('bare')]);
    expect(code).toBe(0);
    const notes = JSON.parse(text('bare', 'mesh.json'));
    expect(notes.density_kg_m3).toBeCloseTo(1060, 9);
    expect(notes.viscosity_Pa_s).toBe(0.0035);
  });

  test('a damaged mesh fails its check with the patch named: exit 1', async () => {
    await runCli(['mesh', run, '--out', scratch.path('damaged')]);
    const whole = text('damaged', 'lumen.stl');
    const end = whole.indexOf('endfacet') + 'endfacet\n'.length;
    writeFileSync(scratch.path('damaged', 'lumen.stl'), whole.slice(0, whole.indexOf('facet')) + whole.slice(end));
    const { code, out } = await runCli(['check', scratch.path('damaged')]);
    expect(code).toBe(1);
    expect(out).toMatch(/^BROKEN +mesh-closed/m);
    // It is still a mesh folder of this program, and may be replaced.
    expect((await runCli(['mesh', run, '--out', scratch.path('damaged')])).code).toBe(0);
  });

  test.each([
    ['--around', '3', /^--around: got "3", expected a whole number from 6 to 256/],
    ['--unit', 'inch', /^--unit: got "inch", expected one of m, mm, um/],
    ['--lengths', 'long', /^--lengths: got "long", expected/],
    ['--keep-above', '-1', /^--keep-above: got "-1", expected a number > 0/],
    [
      '--keep-above',
      '1e9',
      /^--keep-above: got 1000000000 µm, but tree \w+ begins .* radius [\d.]{1,6} µm, expected at most/,
    ],
    [
      '--keep-order',
      '9',
      /^--keep-order: got 9, but tree supply begins with a vessel of order (\d), expected at most \1\n$/,
    ],
  ])('refuses %s %s', async (option, value, says) => {
    const { code, out, err } = await runCli(['mesh', run, option, value, '--out', scratch.path('refused')]);
    expect({ code, out }).toEqual({ code: 2, out: '' });
    expect(err).toMatch(says);
    expect(existsSync(scratch.path('refused'))).toBe(false);
  });

  test('refuses a tree with neither spec nor solution, a mesh folder, and to replace a run', async () => {
    await runCli(['export', run, '--to', scratch.path('tree.swc')]);
    const bare = await runCli(['mesh', scratch.path('tree.swc'), '--out', scratch.path('refused')]);
    expect(bare).toMatchObject({
      code: 2,
      err: expect.stringMatching(/tree\.swc: got neither a flow solution nor a spec/),
    });
    await runCli(['mesh', run, '--out', scratch.path('once')]);
    const twice = await runCli(['mesh', scratch.path('once'), '--out', scratch.path('refused')]);
    expect(twice).toMatchObject({
      code: 2,
      err: expect.stringMatching(/once: got a mesh folder, which holds no tree/),
    });
    const over = await runCli(['mesh', run, '--out', run]);
    expect(over).toMatchObject({ code: 2, err: expect.stringMatching(/^--out: got .*which is no mesh folder/) });
    expect(existsSync(scratch.path('run', 'tree.vtp'))).toBe(true);
  });
});

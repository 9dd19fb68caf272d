import { createHash } from 'node:crypto';
import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import validator from 'gltf-validator';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { soundSpec } from '../support/bend-spec.ts';
import { glbChunks, readGlb, readMsh, readPly, readThreeMf, readVtk } from '../support/mesh-readers.ts';
import { makeScratch, runCli, type Scratch } from '../support/run-cli.ts';

let scratch: Scratch;
let run: string;
let mesh: string;
beforeAll(async () => {
  scratch = makeScratch();
  // A small drop makes wide vessels, so that a tree of few triangles comes out.
  const spec = soundSpec();
  spec.trees[0].inlet.pressure_mmHg = 20.2;
  spec.trees[0].terminals.count = 6;
  writeFileSync(scratch.path('spec.json'), JSON.stringify(spec));
  run = scratch.path('run');
  mesh = scratch.path('mesh');
  await runCli(['grow', scratch.path('spec.json'), '--out', run]);
  await runCli(['mesh', run, '--out', mesh, '--unit', 'mm', '--around', '12']);
});
afterAll(() => scratch.remove());

/** What files and surfaces are compared by: arrays of their size take minutes element by element. */
const digest = (value: Uint8Array | object): string =>
  createHash('sha256')
    .update(value instanceof Uint8Array ? value : JSON.stringify(value))
    .digest('hex');
const bytesOf = (...names: string[]) => new Uint8Array(readFileSync(scratch.path(...names)));

describe('mesh --formats', () => {
  test('adds files, lists them in mesh.json, and leaves the others and the check as they are', async () => {
    const shape = ['--unit', 'mm', '--around', '12'];
    const argv = [...shape, '--formats', 'ply,obj,glb,3mf,msh4,vtu,stl', '--colour-by', 'pressure'];
    const { code, out } = await runCli(['mesh', run, '--out', scratch.path('more'), ...argv]);
    expect(code, out).toBe(0);
    const added = ['lumen.ply', 'lumen.obj', 'lumen.glb', 'lumen.3mf', 'lumen_4.msh', 'lumen.vtu'];
    for (const name of added) expect(out).toContain(name);
    for (const name of ['lumen.stl', 'lumen_one_solid.stl', 'lumen.vtp', 'lumen.msh', 'boundary.csv', 'network.csv'])
      expect(digest(bytesOf('more', name)), name).toBe(digest(bytesOf('mesh', name)));
    const notes = JSON.parse(readFileSync(scratch.path('more', 'mesh.json'), 'utf8'));
    const listed: string[] = notes.files.map(({ name }: { name: string }) => name);
    expect(listed).toEqual(expect.arrayContaining(added));
    for (const name of listed) expect(existsSync(scratch.path('more', name)), name).toBe(true);
    const vtp = readVtk(bytesOf('more', 'lumen.vtp'));
    expect(digest(readPly(bytesOf('more', 'lumen.ply')))).toBe(digest(vtp));
    expect(digest(readVtk(bytesOf('more', 'lumen.vtu')))).toBe(digest(vtp));
    expect(digest(readThreeMf(bytesOf('more', 'lumen.3mf')).corners)).toBe(digest(vtp.corners));
    expect(new Set(readMsh(bytesOf('more', 'lumen_4.msh')).patch)).toEqual(new Set(vtp.patch));
    const { issues } = await validator.validateBytes(bytesOf('more', 'lumen.glb'));
    expect(issues.messages).toEqual([]);
    expect((await runCli(['check', scratch.path('more')])).code).toBe(0);
    // It is a mesh folder like any other, and may be replaced.
    expect((await runCli(['mesh', run, '--out', scratch.path('more'), '--around', '12', '--quiet'])).code).toBe(0);
    expect(existsSync(scratch.path('more', 'lumen.glb'))).toBe(false);
  });

  test.each([
    [['--formats', 'ply,step'], /^--formats: got "step", expected a list of stl, vtp, ply/],
    [
      ['--formats', 'glb', '--colour-by', 'flow'],
      /^--colour-by: got "flow", expected one of patch, pressure, wall-shear/,
    ],
    [['--formats', 'ply', '--colour-by', 'patch'], /^--colour-by: got patch, but nothing written has colours/],
    [['--colour-by', 'pressure'], /^--colour-by: got pressure, but nothing .* expected --formats with glb/],
  ])('refuses %j', async (argv, says) => {
    const { code, out, err } = await runCli(['mesh', run, '--out', scratch.path('refused'), ...argv]);
    expect({ code, out }).toEqual({ code: 2, out: '' });
    expect(err).toMatch(says);
    expect(existsSync(scratch.path('refused'))).toBe(false);
  });
});

describe('export of a mesh', () => {
  test('--around and --stretch shape the mesh of a tree, and are refused where none is made', async () => {
    const facets = async (...words: string[]) => {
      const to = scratch.path('shaped.stl');
      const { code, err } = await runCli(['export', run, '--to', to, ...words]);
      expect(code, err).toBe(0);
      return readFileSync(to, 'utf8').split('endfacet').length - 1;
    };
    const coarse = await facets('--around', '8');
    expect(await facets('--around', '12')).toBeGreaterThan(1.5 * coarse);
    expect(await facets('--around', '8', '--stretch', '1.5')).toBeLessThan(0.9 * coarse);
    for (const [words, told] of [
      [
        ['export', run, '--to', scratch.path('e.stl'), '--around', '5'],
        /--around: got "5", expected a whole number from 6/,
      ],
      [
        ['export', run, '--to', scratch.path('e.stl'), '--stretch', '4'],
        /--stretch: got "4", expected a number from 1/,
      ],
      [['export', mesh, '--to', scratch.path('e.stl'), '--around', '8'], /--around: got it with a mesh folder/],
      [['export', run, '--to', scratch.path('e.vtp'), '--stretch', '2'], /--stretch: got it with a tree format/],
    ] as const) {
      const { code, err } = await runCli([...words]);
      expect(code).toBe(2);
      expect(err).toMatch(told);
    }
  });

  test('folder writes the asked format in the unit of the folder, GLB in metres', async () => {
    const vtp = readVtk(bytesOf('mesh', 'lumen.vtp'));
    const ply = await runCli(['export', mesh, '--to', scratch.path('a.ply')]);
    expect(ply).toMatchObject({ code: 0, out: expect.stringMatching(/^written: .*a\.ply, in mm\n$/) });
    expect(ply.err).toBe('note: .ply holds no pressures, no wall shear\n');
    expect(digest(readPly(bytesOf('a.ply')))).toBe(digest(vtp));
    const glb = await runCli(['export', mesh, '--to', scratch.path('a.glb'), '--colour-by', 'wall-shear', '--quiet']);
    expect(glb).toEqual({ code: 0, out: '', err: '' });
    const reach = (corners: readonly (readonly number[])[]) =>
      corners.flat().reduce((most, x) => Math.max(most, Math.abs(x)), 0);
    expect(reach(readGlb(bytesOf('a.glb')).corners) / reach(vtp.corners)).toBeCloseTo(1e-3, 9);
    expect(glbChunks(bytesOf('a.glb')).json.meshes[0]!.extras).toMatchObject({ colour_by: 'wall-shear' });
    // With a mesh folder these are meshes, not trees.
    for (const name of ['a.vtp', 'a.vtu']) {
      expect((await runCli(['export', mesh, '--to', scratch.path(name)])).code).toBe(0);
      expect(digest(readVtk(bytesOf(name)))).toBe(digest(vtp));
    }
    expect((await runCli(['export', mesh, '--to', scratch.path('a.msh')])).code).toBe(0);
    expect((await runCli(['export', mesh, '--to', scratch.path('a_4.msh')])).code).toBe(0);
    expect(readFileSync(scratch.path('a.msh'), 'utf8')).toMatch(/^\$MeshFormat\n2\.2 /);
    expect(readFileSync(scratch.path('a_4.msh'), 'utf8')).toMatch(/^\$MeshFormat\n4\.1 /);
  });

  test('run meshes it as `mesh` does; .vtp and .vtu of a run stay trees', async () => {
    await runCli(['mesh', run, '--out', scratch.path('metres'), '--formats', '3mf']);
    expect((await runCli(['export', run, '--to', scratch.path('b.3mf')])).code).toBe(0);
    expect(digest(bytesOf('b.3mf'))).toBe(digest(bytesOf('metres', 'lumen.3mf')));
    expect((await runCli(['export', run, '--to', scratch.path('b.stl')])).code).toBe(0);
    expect(digest(bytesOf('b.stl'))).toBe(digest(bytesOf('metres', 'lumen.stl')));
    for (const name of ['b.vtp', 'b.vtu']) {
      expect((await runCli(['export', run, '--to', scratch.path(name)])).code).toBe(0);
      expect((await runCli(['compare', run, scratch.path(name)])).code).toBe(0);
    }
  });

  test('replaces a mesh of the same format, and nothing else', async () => {
    expect((await runCli(['export', mesh, '--to', scratch.path('c.obj')])).code).toBe(0);
    expect((await runCli(['export', run, '--to', scratch.path('c.obj')])).code).toBe(0);
    writeFileSync(scratch.path('mine.obj'), 'v 0 0 0\n');
    mkdirSync(scratch.path('folder.ply'));
    await runCli(['export', run, '--to', scratch.path('tree.vtp')]);
    const before = bytesOf('mesh', 'lumen.vtp');
    for (const [from, to, says] of [
      [
        mesh,
        scratch.path('mine.obj'),
        /^--to: got .*mine\.obj, which is there and holds something else, .* mesh .* \.obj/,
      ],
      [mesh, scratch.path('folder.ply'), /^--to: got .*which is a folder/],
      [mesh, scratch.path('tree.vtp'), /^--to: got .*which is there and holds something else/],
      [mesh, scratch.path('mesh', 'lumen.vtp'), /^--to: got .*which belongs to a mesh folder/],
      [run, scratch.path('mesh', 'lumen.stl'), /^--to: got .*which belongs to a mesh folder/],
      [mesh, scratch.path('run', 'tree.vtp'), /^--to: got .*which belongs to a run/],
      [
        mesh,
        scratch.path('a.swc'),
        /^--to: got .*a\.swc, expected a name that ends in \.stl, .*, which a mesh is written/,
      ],
      [run, scratch.path('a.step'), /^--to: got .*a\.step, expected a name that ends in \.vtp, .*\.glb/],
    ] as const) {
      const { code, err } = await runCli(['export', from, '--to', to]);
      expect(code, to).toBe(2);
      expect(err).toMatch(says);
    }
    expect(digest(bytesOf('mesh', 'lumen.vtp'))).toBe(digest(before));
    expect(readFileSync(scratch.path('mine.obj'), 'utf8')).toBe('v 0 0 0\n');
  });

  test('refuses colours where none are written, and a folder whose lumen.vtp is broken or gone', async () => {
    for (const to of ['d.swc', 'd.ply']) {
      const { code, err } = await runCli(['export', run, '--to', scratch.path(to), '--colour-by', 'pressure']);
      expect({ code, err }).toEqual({
        code: 2,
        err: '--colour-by: got pressure, but nothing written has colours, expected a mesh as .glb\n',
      });
    }
    await runCli(['mesh', run, '--out', scratch.path('broken')]);
    writeFileSync(scratch.path('broken', 'lumen.vtp'), bytesOf('mesh', 'lumen.vtp').subarray(0, 5000));
    const cut = await runCli(['export', scratch.path('broken'), '--to', scratch.path('d.glb')]);
    expect(cut.code).toBe(2);
    expect(cut.err).toMatch(/broken.lumen\.vtp/);
    expect(cut.err).not.toMatch(/^\s+at /m);
    expect(existsSync(scratch.path('d.glb'))).toBe(false);
  });
});

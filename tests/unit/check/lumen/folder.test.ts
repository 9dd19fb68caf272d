import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, test } from 'vitest';
import { checkLumen } from '../../../../src/check/lumen/check-lumen.ts';
import type { CheckResult } from '../../../../src/check/result.ts';
import { effectiveLengths } from '../../../../src/flow/effective-lengths.ts';
import { shortenField } from '../../../../src/flow/shortened-field.ts';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { encodeMeshFolder } from '../../../../src/formats/mesh/mesh-folder.ts';
import { encodeBinaryStl } from '../../../../src/formats/mesh/stl.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { readMesh } from '../../../../src/node/read-mesh.ts';
import { forkSketch, sketchForest, straightSketch } from '../../../support/lumen-forests.ts';

// Two trees, so that points, parts and tree numbers can be mixed up.
const apart = straightSketch(1e-3, 8e-3).map(([p, x, y, z, r]) => [p, x, y + 0.03, z, r] as const);
const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6), apart);
const kinds = ['supply', 'drain'] as const;
const field = solveFlow(forest, kinds, { rootPressures: [8000, 500], viscosity: 3.5e-3, density: 1060 });
const mesh = buildLumen(forest, { kinds });
const shorter = effectiveLengths(forest);
const networks = {
  used: 'axis',
  effectiveLengths: shorter,
  axis: field.pressure,
  effective: shortenField(field, kinds, shorter).pressure,
} as const;

type Folder = Map<string, Uint8Array>;
const write = (unit: 'm' | 'mm'): Folder =>
  new Map(
    encodeMeshFolder({ mesh, forest, field, kinds, density: 1060, viscosity: 3.5e-3, unit, networks }).map((file) => [
      file.name,
      file.bytes,
    ]),
  );
const METRES = write('m');
const scratch = mkdtempSync(join(tmpdir(), 'mesh-folder-'));
afterAll(() => rmSync(scratch, { recursive: true }));

/** Writes a folder and checks it from there. */
function check(files: Folder): CheckResult {
  const path = mkdtempSync(join(scratch, 'm-'));
  for (const [name, bytes] of files) writeFileSync(join(path, name), bytes);
  return checkLumen(readMesh(path));
}

const text = (files: Folder, name: string) => new TextDecoder().decode(files.get(name));
const encode = (of: string) => new TextEncoder().encode(of);
const broken = (result: CheckResult) => result.promises.filter(({ held }) => held === false).map(({ id }) => id);
const unchecked = (result: CheckResult) => result.promises.filter(({ held }) => held === null).map(({ id }) => id);

/** A folder with one file's text changed. */
function changed(name: string, change: (text: string) => string, from = METRES): Folder {
  const was = text(from, name);
  const is = change(was);
  expect(is).not.toBe(was);
  return new Map(from).set(name, encode(is));
}

function notes(change: (notes: ReturnType<typeof JSON.parse>) => void): Folder {
  return changed('mesh.json', (was) => {
    const value = JSON.parse(was);
    change(value);
    return JSON.stringify(value);
  });
}

/** A table with one cell changed. */
function cell(patch: string, column: string, value: string): Folder {
  return changed('boundary.csv', (was) => {
    const rows = was.split('\n').map((line) => line.split(','));
    rows.find(([name]) => name === patch)![rows[0]!.indexOf(column)] = value;
    return rows.map((row) => row.join(',')).join('\n');
  });
}

/** lumen.vtp with bytes of one array changed; the array is found by its declaration. */
function vtp(name: string, change: (view: DataView, at: number) => void): Folder {
  const bytes = METRES.get('lumen.vtp')!.slice();
  const head = new TextDecoder('latin1').decode(bytes);
  const offset = Number(new RegExp(`Name="${name}"[^>]* offset="(\\d+)"`).exec(head)![1]);
  const start = head.indexOf('_', head.indexOf('<AppendedData')) + 1;
  change(new DataView(bytes.buffer), start + offset + 8);
  return new Map(METRES).set('lumen.vtp', bytes);
}

describe('a whole folder', () => {
  test.each(['m', 'mm'] as const)('in %s', (unit) => {
    const result = check(write(unit));
    expect(result.findings).toEqual([]);
    expect(unchecked(result)).toEqual([]);
    for (const { checked, id } of result.promises) expect(checked, id).toBeGreaterThan(0);
  });

  test('with a binary surface, which is one solid already', () => {
    const files = new Map(METRES).set('lumen.stl', encodeBinaryStl(mesh, 'm'));
    expect(check(files).findings).toEqual([]);
    files.delete('lumen_one_solid.stl');
    const result = check(files);
    expect(result.findings).toEqual([]);
    expect(unchecked(result)).toEqual(['file-one-solid']);
  });
});

describe('planted damage', () => {
  const swap = (was: string, pattern: RegExp, by: (...found: string[]) => string) => was.replace(pattern, by);
  const cases: [string, () => Folder, string[], RegExp][] = [
    [
      'a point of lumen.vtp moved by a micrometre',
      () => vtp('Points', (view, at) => view.setFloat64(at, view.getFloat64(at, true) + 1e-6, true)),
      ['file-vtp'],
      /^triangle \d+ of lumen\.vtp, with a corner at \(.*\) m, is not in lumen\.stl$/,
    ],
    [
      'a triangle of lumen.vtp turned over',
      () =>
        vtp('connectivity', (view, at) => {
          const first = view.getInt32(at, true);
          view.setInt32(at, view.getInt32(at + 4, true), true);
          view.setInt32(at + 4, first, true);
        }),
      ['file-vtp'],
      /^triangle 0 of lumen\.vtp/,
    ],
    [
      'a patch of lumen.vtp renamed',
      () => vtp('patch', (view, at) => view.setUint8(at, 'b'.charCodeAt(0))),
      ['file-vtp'],
      /^triangle 0 of lumen\.vtp has patch ball, in lumen\.stl wall$/,
    ],
    [
      'lumen.vtp cut short',
      () => new Map(METRES).set('lumen.vtp', METRES.get('lumen.vtp')!.slice(0, -2000)),
      ['file-vtp'],
      /the file is cut short/,
    ],
    [
      'lumen.vtp cut short in its head',
      () => new Map(METRES).set('lumen.vtp', METRES.get('lumen.vtp')!.slice(0, 300)),
      ['file-vtp'],
      /got no appended data/,
    ],
    [
      'lumen.vtp in another unit',
      () => new Map(METRES).set('lumen.vtp', write('mm').get('lumen.vtp')!),
      ['file-vtp'],
      /^unit of length: got mm, mesh\.json says m$/,
    ],
    [
      'a node of lumen.msh moved',
      () => changed('lumen.msh', (was) => swap(was, /^7 (\S+) /m, (_, x) => `7 ${Number(x) + 1e-6} `)),
      ['file-msh'],
      /^triangle \d+ of lumen\.msh/,
    ],
    [
      'a triangle of lumen.msh in another patch',
      () => changed('lumen.msh', (was) => swap(was, /^(\d+ 2 2) 1 1/m, (_, head) => `${head} 2 2`)),
      ['file-msh'],
      /has patch inlet_0, in lumen\.stl wall$/,
    ],
    [
      'a triangle of lumen.msh missing',
      () =>
        changed('lumen.msh', (was) =>
          swap(
            swap(was, /^1 2 2 .*\n/m, () => ''),
            /\$Elements\n(\d+)/,
            (_, n) => `$Elements\n${Number(n) - 1}`,
          ),
        ),
      ['file-msh'],
      /^lumen\.msh has \d+ triangles, lumen\.stl \d+$/,
    ],
    [
      'lumen.msh cut short',
      () => new Map(METRES).set('lumen.msh', METRES.get('lumen.msh')!.slice(0, 60_000)),
      ['file-msh'],
      /cut short|expected/,
    ],
    [
      'lumen.msh cut short at the end of a line',
      () => changed('lumen.msh', (was) => was.slice(0, was.lastIndexOf('$EndElements'))),
      ['file-msh'],
      /the file is cut short/,
    ],
    [
      'a corner of lumen_one_solid.stl moved',
      () => changed('lumen_one_solid.stl', (was) => swap(was, /vertex (\S+)/, (_, x) => `vertex ${Number(x) + 1e-6}`)),
      ['file-one-solid'],
      /^triangle 0 of lumen_one_solid\.stl/,
    ],
    [
      'a triangle of lumen_one_solid.stl twice in place of another',
      () =>
        changed('lumen_one_solid.stl', (was) => {
          const facets = was.split(/(?= {2}facet)/);
          facets[2] = facets[1]!;
          return facets.join('');
        }),
      ['file-one-solid'],
      /^triangle 1 of lumen_one_solid\.stl/,
    ],
    [
      'lumen_one_solid.stl cut short',
      () => new Map(METRES).set('lumen_one_solid.stl', METRES.get('lumen_one_solid.stl')!.slice(0, 50_000)),
      ['file-one-solid'],
      /./,
    ],
    [
      'a wrong count in mesh.json',
      () => notes((of) => of.counts.vertices++),
      ['notes-counts'],
      /^counts\.vertices: got \d+, counted \d+$/,
    ],
    ['a wrong count of vessels', () => notes((of) => of.counts.vessels--), ['notes-counts'], /^counts\.vessels: /],
    [
      'a point outside the lumen',
      () =>
        notes((of) => {
          of.inside_points_m[1][1] += 2e-3;
        }),
      ['notes-inside'],
      /^inside_points_m\[1\]: .* lies inside 0 parts, expected one$/,
    ],
    [
      'one point twice',
      () =>
        notes((of) => {
          of.inside_points_m[1] = of.inside_point_m;
        }),
      ['notes-inside'],
      /lies in the same part/,
    ],
    [
      'another first point',
      () =>
        notes((of) => {
          of.inside_point_m[0] += 1e-5;
        }),
      ['notes-inside'],
      /^inside_point_m: /,
    ],
    [
      'a resistance where nothing was cut off',
      () => cell('outlet_1', 'resistance_Pa_s_m3', '5'),
      ['boundary-resistance'],
      /got "5", expected 0: nothing was cut off/,
    ],
    [
      "a resistance at a tree's root",
      () => cell('inlet_0', 'resistance_Pa_s_m3', '0'),
      ['boundary-resistance'],
      /expected nothing at a tree's root/,
    ],
    [
      'no resistance at an outlet',
      () => cell('outlet_1', 'resistance_Pa_s_m3', ''),
      ['boundary-resistance'],
      /got "", expected 0 or more/,
    ],
    [
      'no resistance where something was cut off',
      () =>
        notes((of) => {
          of.cut_off = { patches: ['outlet_2'] };
        }),
      ['boundary-resistance'],
      /expected more than 0/,
    ],
    ['another vessel', () => cell('outlet_1', 'vessel', '2'), ['boundary-names'], /^vessel: got "2", expected 1/],
    [
      "another vessel at a tree's root",
      () => cell('inlet_0', 'vessel', '2'),
      ['boundary-names'],
      /segment 2 does not end at the cap/,
    ],
    [
      'a network cut short',
      () => changed('network.csv', (was) => was.trimEnd().slice(0, was.trimEnd().lastIndexOf('\n') + 1)),
      ['network-ends', 'boundary-names', 'notes-counts'],
      /./,
    ],
    [
      'a lumen.stl in another unit',
      () => new Map(METRES).set('lumen.stl', write('mm').get('lumen.stl')!),
      ['cap-area'],
      /./,
    ],
  ];
  test.each(cases)('%s', (name, make, ids, says) => {
    const result = check(make());
    if (name.startsWith('a lumen.stl') || name.startsWith('a network'))
      expect(broken(result)).toEqual(expect.arrayContaining(ids));
    else expect(broken(result)).toEqual(ids);
    expect(result.findings.map(({ message }) => message).join('\n')).toMatch(new RegExp(says.source, 'm'));
    const file = /lumen[\w.]*\.(vtp|msh|stl)/.exec(name)?.[0];
    if (file !== undefined && ids[0]!.startsWith('file'))
      expect(result.findings[0]!.vessel.startsWith(file), result.findings[0]!.vessel).toBe(true);
  });

  test.each([
    ['lumen.vtp', ['file-vtp']],
    ['lumen.msh', ['file-msh']],
    ['lumen_one_solid.stl', ['file-one-solid']],
    ['network.csv', ['network-drop', 'network-flow', 'network-ends', 'network-lengths', 'network-drops']],
    ['mesh.json', ['network-drop', 'network-drops', 'notes-counts', 'notes-inside']],
  ])('%s missing', (name, open) => {
    const files = new Map(METRES);
    files.delete(name);
    const result = check(files);
    expect(broken(result)).toEqual(['folder-files']);
    expect(result.findings).toMatchObject([{ vessel: name, message: 'the folder lacks the file' }]);
    expect(unchecked(result)).toEqual(open);
  });
});

import { existsSync, mkdirSync, readdirSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { type Bendable, type BrokenSpec, bent, soundSpec } from '../support/bend-spec.ts';
import { BROKEN_SPECS } from '../support/broken-specs.ts';
import { BROKEN_SURFACES, type BrokenSurface } from '../support/broken-surfaces.ts';
import { type CliResult, makeScratch, runCli, type Scratch } from '../support/run-cli.ts';

let scratch: Scratch;
let count = 0;
beforeAll(() => {
  scratch = makeScratch();
});
afterAll(() => scratch.remove());

/** Grows a spec that must be refused: exit 2, a line a fault, no stack, nothing written. */
async function refusal(
  text: string,
  besides: (folder: string) => void = () => {},
): Promise<CliResult & { lines: string[] }> {
  const folder = scratch.path(String(count++));
  mkdirSync(folder);
  writeFileSync(`${folder}/spec.json`, text);
  besides(folder);
  const before = readdirSync(folder).sort();
  const result = await runCli(['grow', `${folder}/spec.json`, '--out', `${folder}/deep/run`]);
  const err = result.err.replaceAll(`${folder}/spec.json`, 'spec');
  expect(result.code, err).toBe(2);
  expect(result.out).toBe('');
  expect(readdirSync(folder).sort()).toEqual(before);
  expect(err).not.toMatch(/^\s+at .*:\d+:\d+/m);
  const lines = err.trimEnd().split('\n');
  for (const line of lines) expect(line).toMatch(/^.+: .*got .*, expected /);
  return { ...result, err, lines };
}

const INLET_AT = (x: number, y: number, z: number) => (spec: Bendable) => {
  spec.trees[0].inlet.position_mm = [x, y, z];
};

/** What only the tissue shows to be wrong. */
const WRONG_IN_TISSUE: readonly BrokenSpec[] = [
  bent('inlet far outside', /inlet/, INLET_AT(-50, 6, 3)),
  bent('inlet outside a corner', /inlet/, INLET_AT(-3, -3, -3)),
  bent('inlet on the boundary, looking out', /inlet/, (spec) => {
    spec.trees[0].inlet.direction = [-1, 0, 0];
  }),
  bent('tissue too thin for the first vessel', /inlet: got a first vessel of radius/, (spec) => {
    spec.tissue.max_mm = [12, 12, 0.02];
    spec.trees[0].inlet.position_mm = [0, 6, 0.01];
  }),
  bent('tissue too small for any vessel', /inlet: got a first vessel of radius/, (spec) => {
    spec.tissue.max_mm = [0.01, 0.01, 0.01];
    spec.trees[0].inlet.position_mm = [0, 0.005, 0.005];
  }),
  bent('intersection of parts that do not meet', /^tissue/, (spec) => {
    const ball = (x: number) => ({ shape: 'sphere', center_mm: [x, 0, 0], radius_mm: 1 });
    spec.tissue = { shape: 'intersection', parts: [ball(0), ball(9)] };
  }),
  bent('difference that leaves nothing', /^tissue/, (spec) => {
    const ball = (radius: number) => ({ shape: 'sphere', center_mm: [0, 0, 0], radius_mm: radius });
    spec.tissue = { shape: 'difference', of: ball(1), minus: [ball(2)] };
  }),
  bent('all of it forbidden', /^tissue/, (spec) => {
    spec.tissue.forbidden = [{ shape: 'box', min_mm: [-1, -1, -1], max_mm: [13, 13, 13] }];
  }),
  bent('no point inside', /^trees\[0\]\.terminals\.points\[0\]: got a point/, (spec) => {
    spec.trees[0].terminals = { points_mm: [[6, 6, 30]], pressure_mmHg: 20 };
  }),
];

describe('specs that grow refuses', () => {
  test.each(BROKEN_SPECS)('$name', async ({ text, where, says }) => {
    const { lines, err } = await refusal(text);
    const hits = lines.filter((line) => {
      // Paths such as tissue.max_mm[0] hold no colon but in quoted keys, so the first that is followed by a space ends them.
      const place = /^(.*?): /.exec(line)![1]!;
      return typeof where === 'string' ? place === where : where.test(place);
    });
    expect(hits, err.slice(0, 2000)).not.toHaveLength(0);
    if (says) expect(hits.join('\n')).toMatch(says);
  });

  test.each(WRONG_IN_TISSUE)('$name', async ({ text, where }) => {
    const { lines } = await refusal(text);
    expect(
      lines.some((line) => new RegExp(where).test(line)),
      lines.join('\n'),
    ).toBe(true);
  });
});

function surfaceSpec(file: string): string {
  const spec = soundSpec();
  spec.tissue = { shape: 'surface', file, unit: 'mm' };
  return JSON.stringify(spec);
}

describe('surfaces that grow refuses as tissue', () => {
  test.each(BROKEN_SURFACES)('$name$extension', async ({ extension, bytes, expected }: BrokenSurface) => {
    const file = `shape${extension}`;
    const { lines } = await refusal(surfaceSpec(file), (folder) => writeFileSync(`${folder}/${file}`, bytes));
    const hits = lines.filter((line) => line.startsWith(file));
    expect(hits.join('\n')).toMatch(expected);
  });

  test('a file that is not there, named by its place in the spec', async () => {
    const { lines } = await refusal(surfaceSpec('nowhere.stl'));
    expect(lines).toEqual([
      'tissue.file: got nowhere.stl, which does not exist, expected a surface file beside the spec',
    ]);
  });

  test('a folder in place of a file', async () => {
    const { lines } = await refusal(surfaceSpec('folder.stl'), (folder) => mkdirSync(`${folder}/folder.stl`));
    expect(lines[0]).toMatch(/^tissue\.file: got folder\.stl, which is a folder/);
  });

  test('an ending that no reader knows', async () => {
    const { lines } = await refusal(surfaceSpec('a.step'), (folder) =>
      writeFileSync(`${folder}/a.step`, 'ISO-10303-21;'),
    );
    expect(lines[0]).toMatch(/^tissue\.file: got "a\.step", expected a path that ends in \.stl, \.ply or \.obj/);
  });

  test('every broken file of a spec is named at once', async () => {
    const spec = soundSpec();
    const part = (file: string) => ({ shape: 'surface', file, unit: 'mm' });
    spec.tissue = { shape: 'union', parts: [part('one.stl'), part('two.ply')], forbidden: [part('three.obj')] };
    const { lines } = await refusal(JSON.stringify(spec), (folder) => writeFileSync(`${folder}/two.ply`, ''));
    expect(lines.map((line) => line.slice(0, line.indexOf(':')))).toEqual([
      'tissue.parts[0].file',
      'two.ply',
      'tissue.forbidden[0].file',
    ]);
  });
});

test('the corpus holds at least two hundred cases', () => {
  expect(BROKEN_SPECS.length + WRONG_IN_TISSUE.length + BROKEN_SURFACES.length).toBeGreaterThanOrEqual(200);
  expect(existsSync(scratch.folder)).toBe(true);
});

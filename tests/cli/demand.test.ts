import { mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { type Bendable, soundSpec } from '../support/bend-spec.ts';
import { makeScratch, runCli, type Scratch } from '../support/run-cli.ts';
import { stlBinary } from '../support/surface-files.ts';
import { cube, moved } from '../support/surfaces.ts';

let scratch: Scratch;
beforeAll(() => {
  scratch = makeScratch();
});
afterAll(() => scratch.remove());

/** A spec in a folder of its own; gives its path. */
function write(name: string, change: (spec: Bendable) => void): string {
  const spec = soundSpec();
  spec.trees[0].terminals = { count: 60, pressure_mmHg: 20, flow_share: 'territory' };
  spec.tissue.demand = [{ shape: 'surface', file: 'hot.stl', unit: 'mm', weight: 6 }];
  change(spec);
  mkdirSync(scratch.path(name));
  const block = moved(cube(), ([x, y, z]) => [6 + 4 * x, 2 + 4 * y, 1 + 4 * z]);
  writeFileSync(scratch.path(name, 'hot.stl'), stlBinary(block));
  writeFileSync(scratch.path(name, 'spec.json'), JSON.stringify(spec));
  return scratch.path(name, 'spec.json');
}

const report = (run: string) => JSON.parse(readFileSync(scratch.path(run, 'report.json'), 'utf8'));

describe('demand and territories on the command line', () => {
  test('a run tells them in its report, its page and its tree, keeps the surface beside it, and is proved and grown again', async () => {
    const run = scratch.path('run');
    const grown = await runCli(['grow', write('spec', () => {}), '--out', run]);
    expect({ code: grown.code, err: grown.err }).toEqual({ code: 0, err: '' });
    const { territory } = report('run').trees[0];
    expect(territory.min_m3).toBeGreaterThan(0);
    expect(territory.median_m3).toBeGreaterThan(territory.min_m3);
    expect(territory.max_m3).toBeGreaterThan(territory.median_m3);
    expect(territory.variation).toBeGreaterThan(0.05);
    // 12 × 12 × 6 mm, of which 4 × 4 × 4 mm demand six times as much.
    expect((60 * territory.median_m3) / (864e-9 + 5 * 64e-9)).toBeCloseTo(1, 0);
    expect(readFileSync(scratch.path('run', 'report.html'), 'utf8')).toContain('<h2>Territories</h2>');
    expect(readFileSync(scratch.path('run', 'tree.vtp')).includes('Name="territory_m3"')).toBe(true);
    expect(JSON.parse(readFileSync(scratch.path('run', 'spec.json'), 'utf8')).tissue.demand[0]).toEqual({
      shape: 'surface',
      file: 'hot.stl',
      unit: 'mm',
      weight: 6,
    });
    const checked = await runCli(['check', run, '--json']);
    expect(checked.code).toBe(0);
    const promises: { id: string; held: boolean; checked: number }[] = JSON.parse(checked.out).promises;
    expect(promises.find(({ id }) => id === 'territory')).toMatchObject({ held: true, checked: 60 });
    await runCli(['grow', scratch.path('run', 'spec.json'), '--out', scratch.path('again')]);
    const bytes = (name: string) => readFileSync(scratch.path(name, 'tree.vtp'));
    expect(bytes('again').equals(bytes('run'))).toBe(true);
  });

  test('tables that are exported hold territories, and a run whose flow is solved again keeps them', async () => {
    await runCli(['export', scratch.path('run'), '--to', scratch.path('t.csv')]);
    const [head] = readFileSync(scratch.path('t.vessels.csv'), 'utf8').split('\n');
    expect(head).toMatch(/,territory_m3$/);
    const solved = await runCli([
      'flow',
      scratch.path('run'),
      '--narrow',
      'supply:9:0.3',
      '--out',
      scratch.path('narrow'),
    ]);
    expect(solved.code).toBe(0);
    expect(report('narrow').trees[0].territory).toEqual(report('run').trees[0].territory);
    const checked = await runCli(['check', scratch.path('narrow')]);
    expect(checked.out).toMatch(/territory .*not checked: changed after growth/);
    expect(checked.code).toBe(0);
  });

  test('a tree that shares equally tells none', async () => {
    const spec = write('equal', ({ trees }) => Object.assign(trees[0].terminals, { flow_share: 'equal' }));
    expect((await runCli(['grow', spec, '--out', scratch.path('even')])).code).toBe(0);
    expect(report('even').trees[0].territory).toBeNull();
    expect(readFileSync(scratch.path('even', 'report.html'), 'utf8')).not.toContain('Territories');
    expect(readFileSync(scratch.path('even', 'tree.vtp')).includes('territory_m3')).toBe(false);
  });

  test.each([
    [
      'weights of 0 all over',
      (spec: Bendable) =>
        Object.assign(spec.tissue, {
          demand: [{ shape: 'box', min_mm: [-1, -1, -1], max_mm: [20, 20, 20], weight: 0 }],
        }),
      [/^tissue\.demand: got weights of 0 all over/],
    ],
    [
      'a surface that is not there',
      (spec: Bendable) => Object.assign(spec.tissue.demand[0], { file: 'cold.stl' }),
      [/tissue\.demand\[0\]\.file.*cold\.stl/],
    ],
    [
      'several faults',
      (spec: Bendable) => {
        spec.tissue.demand.push(
          { shape: 'sphere', center_mm: [1, 1, 1], radius_mm: 1, weight: -2 },
          { shape: 'image' },
        );
        spec.trees[0].terminals.flow_share = 'by_territory';
      },
      [/demand\[1\]\.weight.*got -2/, /demand\[2\]\.shape.*does not have it yet/, /flow_share.*got "by_territory"/],
    ],
  ] as const)('%s: exit 2, all faults, nothing written', async (name, change, said) => {
    const { code, out, err } = await runCli(['grow', write(name, change), '--out', scratch.path('no')]);
    expect({ code, out }).toEqual({ code: 2, out: '' });
    for (const message of said) expect(err).toMatch(new RegExp(message.source, 'm'));
    expect(scratch.names()).not.toContain('no');
  });
});

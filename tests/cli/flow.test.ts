import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { readTree } from '../../src/node/index.ts';
import { tubeLength } from '../../src/tree/vessels.ts';
import { soundSpec } from '../support/bend-spec.ts';
import { makeScratch, runCli, type Scratch, tinySpec } from '../support/run-cli.ts';

let scratch: Scratch;
let run: string;
beforeAll(async () => {
  scratch = makeScratch();
  writeFileSync(scratch.path('spec.json'), tinySpec(15));
  run = scratch.path('run');
  await runCli(['grow', scratch.path('spec.json'), '--out', run]);
});
afterAll(() => scratch.remove());

const recordOf = (name: string) => readTree(scratch.path(name)).record;

describe('flow', () => {
  test('with nothing changed gives the tree of the run again, byte for byte', async () => {
    const { code } = await runCli(['flow', run, '--out', scratch.path('same')]);
    expect(code).toBe(0);
    for (const name of ['tree.vtp', 'spec.json']) {
      expect(readFileSync(scratch.path('same', name)).equals(readFileSync(scratch.path('run', name)))).toBe(true);
    }
  });

  test('another viscosity keeps flows and scales every drop', async () => {
    const { code, out } = await runCli(['flow', run, '--viscosity', '7mPa_s', '--out', scratch.path('thick')]);
    expect(code).toBe(0);
    expect(out).toContain('viscosity of 7 mPa·s');
    expect(out).toContain('not checked, as the change breaks it: terminals have the asked pressure');
    const [before, after] = [recordOf('run'), recordOf('thick')];
    for (let i = 0; i < before.forest.count; i++) {
      const root = before.field!.pressure[0]!;
      expect(after.forest.flow[i]).toBe(before.forest.flow[i]);
      // The spec says 3.5 mPa·s.
      expect(root - after.field!.pressure[i]!).toBeCloseTo(2 * (root - before.field!.pressure[i]!), 6);
    }
    const written = JSON.parse(readFileSync(scratch.path('thick', 'spec.json'), 'utf8'));
    expect(written.blood.viscosity.value_Pa_s).toBe(0.0035);
    expect(written.solved_again).toEqual({ viscosity_Pa_s: 0.007 });
    const checked = await runCli(['check', scratch.path('thick')]);
    expect(checked).toMatchObject({ code: 0, err: '' });
    expect(checked.out).toMatch(
      /^– +terminal-pressure .*not checked: changed after growth \(flow: solved with a viscosity of 7 mPa·s\)$/m,
    );
    expect(checked.out).toMatch(/^held +viscosity/m);
    expect(checked.out).toMatch(/^held +junction-law/m);
    expect(checked.out).toMatch(/^held +inlet-flow/m);
  });

  test('spec.json of a tree solved again grows the tree as it was', async () => {
    const { code } = await runCli(['grow', scratch.path('thick', 'spec.json'), '--out', scratch.path('regrown')]);
    expect(code).toBe(0);
    for (const name of ['tree.vtp', 'spec.json']) {
      expect(readFileSync(scratch.path('regrown', name)).equals(readFileSync(scratch.path('run', name)))).toBe(true);
    }
  });

  test('on top of another, keeps what was changed before; back to the spec, is the tree of the run', async () => {
    const argv = ['flow', scratch.path('thick'), '--narrow', 'supply:0:0.25', '--out', scratch.path('both')];
    expect((await runCli(argv)).code).toBe(0);
    const again = ['flow', scratch.path('both'), '--narrow', '2:0.5', '--out', scratch.path('more'), '--json'];
    const { code, out } = await runCli(again);
    expect(code).toBe(0);
    expect(JSON.parse(out).changes).toHaveLength(3);
    expect(JSON.parse(recordOf('more').provenance!).solved_again).toEqual({
      viscosity_Pa_s: 0.007,
      narrowed: [
        { vessel: 'supply:0', fraction: 0.25 },
        { vessel: 'supply:2', fraction: 0.5 },
      ],
    });
    expect(recordOf('more').field!.viscosity[1]).toBe(0.007);
    expect((await runCli(['check', scratch.path('more')])).code).toBe(0);
    const back = ['flow', scratch.path('thick'), '--viscosity', '3.5mPa_s', '--out', scratch.path('back')];
    expect((await runCli(back)).code).toBe(0);
    expect(readFileSync(scratch.path('back', 'tree.vtp')).equals(readFileSync(scratch.path('run', 'tree.vtp')))).toBe(
      true,
    );
  });

  test('what a change does not touch stays strict: a solution that is off breaks its promise', async () => {
    const { record, format } = readTree(scratch.path('both'));
    const field = record.field!;
    const pressure = Float64Array.from(field.pressure as ArrayLike<number>, (p, i) => (i === 3 ? p + 1 : p));
    const bytes = format.encode({ ...record, field: { ...field, pressure } })[0]!.bytes;
    writeFileSync(scratch.path('off.vtp'), bytes);
    const { code, out } = await runCli(['check', scratch.path('off.vtp')]);
    expect(code).toBe(1);
    expect(out).toMatch(/^BROKEN +pressure/m);
  });

  test('a mesh of it is told the viscosity it was solved with', async () => {
    const argv = ['mesh', scratch.path('thick'), '--keep-order', '2', '--out', scratch.path('mesh')];
    await runCli(argv);
    expect(readFileSync(scratch.path('mesh', 'mesh.json'), 'utf8')).toContain('0.007');
  });

  test('a narrowed vessel keeps all end pressures, and its flow falls', async () => {
    const argv = ['flow', run, '--narrow', 'supply:0:0.5', '--out', scratch.path('narrow'), '--json'];
    const { code, out } = await runCli(argv);
    expect(code).toBe(0);
    expect(JSON.parse(out)).toMatchObject({ held: true, changes: ['supply:0 narrowed: 50 % of its radius taken off'] });
    const [before, after] = [recordOf('run'), recordOf('narrow')];
    const { forest, field } = after;
    expect(forest.radius[1]).toBe(0.5 * before.forest.radius[1]!);
    const whole = before.field!.pressure[0]! - soundSpec().trees[0].terminals.pressure_mmHg * 133.322387415;
    const hasChild = new Set(Array.from(forest.parent as ArrayLike<number>));
    for (let i = 1; i < forest.count; i++) {
      if (!hasChild.has(i))
        expect(Math.abs(field!.pressure[i]! - before.field!.pressure[i]!)).toBeLessThan(1e-9 * whole);
    }
    // All terminals share one pressure, so the whole is two resistances in a row: R₀ grows by 2⁴ and the rest stays.
    const first = (record: typeof before) =>
      (8 * 0.0035 * tubeLength(record.forest, 1)) / (Math.PI * record.forest.radius[1]! ** 4);
    const all = whole / before.forest.flow[0]!;
    const wanted = whole / (all - first(before) + 16 * first(before));
    expect(forest.flow[0]! / wanted).toBeCloseTo(1, 9);
    const { code: checked, out: table } = await runCli(['check', scratch.path('narrow')]);
    expect(checked).toBe(0);
    const why = 'not checked: changed after growth \\(flow: supply:0 narrowed: 50 % of its radius taken off\\)';
    for (const id of ['junction-law', 'inlet-flow', 'terminal-flow']) {
      expect(table).toMatch(new RegExp(`^– +${id} .*${why}$`, 'm'));
    }
    for (const id of ['terminal-pressure', 'conservation', 'pressure', 'cost'])
      expect(table).toMatch(new RegExp(`^held +${id}`, 'm'));
  });

  test('flow that would run backwards is told of: exit 1, nothing written', async () => {
    const spec = soundSpec();
    spec.sizing = { rule: 'least-power' };
    spec.trees[0].terminals = { count: 15 };
    writeFileSync(scratch.path('unequal.json'), JSON.stringify(spec));
    await runCli(['grow', scratch.path('unequal.json'), '--out', scratch.path('unequal')]);
    const out = scratch.path('backwards');
    const result = await runCli(['flow', scratch.path('unequal'), '--narrow', 'supply:0:0.999', '--out', out]);
    expect(result.code).toBe(1);
    expect(result.out).toMatch(/flow would run backwards in \d+ vessels, first supply:\d+; nothing was written/);
    expect(existsSync(out)).toBe(false);
  });

  test.each([
    ['--narrow', 'supply:12', /expected <tree>:<vessel>:<fraction>/],
    ['--narrow', 'supply:0:1', /above 0 and below 1/],
    ['--narrow', 'supply:0:half', /above 0 and below 1/],
    ['--narrow', 'supply:999:0.5', /expected one from 0 to \d+/],
    ['--narrow', 'vein:0:0.5', /expected one of supply/],
    ['--viscosity', '3.5', /with its unit, such as/],
    ['--viscosity', '3.5Pa', /with its unit, such as/],
    ['--viscosity', '0mPa_s', /number > 0/],
    ['--viscosity', '2Pa_s', /got 2 Pa·s, expected 0.00001 to 1 Pa·s/],
  ])('refuses %s %s', async (option, value, says) => {
    const { code, err } = await runCli(['flow', run, option, value, '--out', scratch.path('refused')]);
    expect(code).toBe(2);
    expect(err).toMatch(new RegExp(`^${option}: got .*`));
    expect(err).toMatch(says);
    expect(existsSync(scratch.path('refused'))).toBe(false);
  });

  test('refuses a tree without a spec, and to replace the run it reads', async () => {
    await runCli(['export', run, '--to', scratch.path('bare.csv')]);
    const bare = await runCli(['flow', scratch.path('bare.csv'), '--out', scratch.path('refused')]);
    expect(bare).toMatchObject({ code: 2, err: expect.stringMatching(/bare\.csv: got a tree without a spec/) });
    const same = await runCli(['flow', run, '--out', run]);
    expect(same).toMatchObject({ code: 2, err: expect.stringMatching(/^--out: got .*the run that is read/) });
  });
});

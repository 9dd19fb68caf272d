import { cpSync, existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { splitTreePath } from '../../src/index.ts';
import { soundSpec } from '../support/bend-spec.ts';
import { makeScratch, runCli, type Scratch } from '../support/run-cli.ts';

/* What is done with a run that is there: check, compare, export. */

const VTP = splitTreePath('tree.vtp', 'test').format;

let scratch: Scratch;
let run: string;
let other: string;
beforeAll(async () => {
  scratch = makeScratch();
  const spec = scratch.path('spec.json');
  writeFileSync(spec, JSON.stringify({ ...soundSpec(), sizing: { rule: 'least-power' } }));
  run = scratch.path('run');
  other = scratch.path('other');
  await runCli(['grow', spec, '--terminals', '25', '--out', run]);
  await runCli(['grow', spec, '--terminals', '25', '--seed', 'other', '--out', other]);
});
afterAll(() => scratch.remove());

/** A copy of the run with one of its files changed. */
function copyWith(name: string, file: string, change: (content: Buffer) => Buffer | string): string {
  const copy = scratch.path(name);
  cpSync(run, copy, { recursive: true });
  const path = scratch.path(name, file);
  writeFileSync(path, change(readFileSync(path)));
  return copy;
}

/** The run with the radius of one vessel multiplied in its tree file. */
function withRadius(name: string, factor: number): string {
  return copyWith(name, 'tree.vtp', (content) => {
    const { record } = VTP.decode([{ name: 'tree.vtp', bytes: new Uint8Array(content) }]);
    const radius = Float64Array.from(record.forest.radius as ArrayLike<number>);
    radius[5]! *= factor;
    return Buffer.from(VTP.encode({ ...record, forest: { ...record.forest, radius } })[0]!.bytes);
  });
}

describe('check', () => {
  test('finds that a run keeps its promises, its report’s cost among them: exit 0', async () => {
    const { code, out, err } = await runCli(['check', run]);
    expect({ code, err }).toEqual({ code: 0, err: '' });
    expect(out).toMatch(/^held +containment/m);
    expect(out).toMatch(/^held +cost +≤ 1\.00e-9 .* 3$/m);
    expect(out).toMatch(/\d+ held, 0 broken/);
  });

  test('a vessel made wider breaks promises that are named with it: exit 1', async () => {
    const { code, out } = await runCli(['check', withRadius('wide', 1.5)]);
    expect(code).toBe(1);
    expect(out).toMatch(/^BROKEN +junction-law/m);
    expect(out).toMatch(/^ {2}supply:4: /m);
  });

  test('a report that claims another cost: exit 1', async () => {
    const copy = copyWith('claim', 'report.json', (content) => {
      const report = JSON.parse(content.toString());
      report.cost.total_W *= 1 + 1e-6;
      return JSON.stringify(report);
    });
    const { code, out } = await runCli(['check', copy]);
    expect(code).toBe(1);
    expect(out).toMatch(/total_W: the report says/);
  });

  test('a report that is none: exit 2', async () => {
    const { code, err } = await runCli(['check', copyWith('no report', 'report.json', () => '{')]);
    expect(code).toBe(2);
    expect(err).toMatch(/report\.json: got no JSON/);
  });

  test('a spec beside the tree that is not the tree’s own is told of', async () => {
    const { code, err } = await runCli(['check', copyWith('spec', 'spec.json', () => '{}')]);
    expect(code).toBe(0);
    expect(err).toMatch(/note: .*spec\.json is not the spec that tree\.vtp carries/);
  });

  test('a tree that carries a broken spec: exit 2', async () => {
    const copy = copyWith('provenance', 'tree.vtp', (content) => {
      const { record } = VTP.decode([{ name: 'tree.vtp', bytes: new Uint8Array(content) }]);
      return Buffer.from(VTP.encode({ ...record, provenance: '{"tissue": 1}' })[0]!.bytes);
    });
    const { code, err } = await runCli(['check', copy]);
    expect(code).toBe(2);
    expect(err).toMatch(/^tissue: got 1/m);
  });

  test('--json is one document with promises and findings', async () => {
    const { code, out } = await runCli(['check', scratch.path('wide'), '--json']);
    expect(code).toBe(1);
    const value = JSON.parse(out);
    expect(value).toMatchObject({ kind: 'tree', held: false });
    expect(value.findings[0]).toMatchObject({
      unit: expect.any(String),
      vessel: expect.stringMatching(/^supply:\d+$/),
    });
  });
});

describe('compare', () => {
  test('the same bytes: identical, exit 0', async () => {
    const { code, out } = await runCli(['compare', run, scratch.path('run', 'tree.vtp')]);
    expect(code).toBe(0);
    expect(out).toMatch(/^identical/);
  });

  test('within tolerances, and beyond them with the first difference named', async () => {
    const near = withRadius('near', 1 + 1e-8);
    expect(await runCli(['compare', run, near])).toMatchObject({ code: 0, out: expect.stringMatching(/^equivalent/) });
    writeFileSync(scratch.path('strict.json'), '{"radius_rel": 1e-9}');
    const { code, out } = await runCli(['compare', run, near, '--tolerance', scratch.path('strict.json')]);
    expect(code).toBe(1);
    expect(out).toMatch(/first difference: radius of supply:4 is/);
  });

  test('another seed: different, exit 1, as JSON and JUnit XML too', async () => {
    const junit = scratch.path('new', 'compare.xml');
    const { code, out, err } = await runCli(['compare', run, other, '--json', '--junit', junit]);
    expect({ code, err }).toEqual({ code: 1, err: '' });
    expect(JSON.parse(out)).toMatchObject({ verdict: 'different', level: 'tree' });
    expect(readFileSync(junit, 'utf8')).toMatch(/<failure type="(topology|values)"/);
  });

  test('another format: the same in every value, and what it cannot hold is skipped', async () => {
    const json = scratch.path('same.json');
    await runCli(['export', run, '--to', json]);
    expect((await runCli(['compare', run, json])).out).toMatch(/^identical: the same in every value\n/);
    const swc = scratch.path('same.swc');
    await runCli(['export', run, '--to', swc]);
    const { code, out } = await runCli(['compare', run, swc]);
    expect(code).toBe(0);
    expect(out).toMatch(/^pressure +not held by \.swc$/m);
    expect(out).not.toMatch(/Infinity/);
  });

  test('a flow solution that only one has: exit 1', async () => {
    const copy = copyWith('unsolved', 'tree.vtp', (content) => {
      const { record } = VTP.decode([{ name: 'tree.vtp', bytes: new Uint8Array(content) }]);
      return Buffer.from(VTP.encode({ ...record, field: null })[0]!.bytes);
    });
    const { code, out } = await runCli(['compare', run, copy]);
    expect(code).toBe(1);
    expect(out).toMatch(/first difference: pressure is only in A: B has none/);
  });

  test('a tolerance that is none, or a file that is not there: exit 2', async () => {
    writeFileSync(scratch.path('odd.json'), '{"radius": 1, "flow_rel": -1}');
    const { code, err } = await runCli(['compare', run, other, '--tolerance', scratch.path('odd.json')]);
    expect(code).toBe(2);
    expect(err.trimEnd().split('\n')).toHaveLength(2);
    expect(err).toMatch(/did you mean radius_rel/);
    const missing = await runCli(['compare', run, other, '--tolerance', scratch.path('missing.json')]);
    expect(missing).toMatchObject({
      code: 2,
      err: expect.stringMatching(/^--tolerance: got .*missing\.json, which does not/),
    });
  });
});

describe('export', () => {
  test.each([
    ['tree.vtp', ['tree.vtp'], 'identical'],
    ['tree.csv', ['tree.nodes.csv', 'tree.vessels.csv'], 'equivalent'],
    ['tree.json', ['tree.json'], 'identical'],
    ['tree.swc', ['tree.swc'], 'equivalent'],
  ])('writes %s, and it reads back as the same tree', async (name, files, verdict) => {
    const folder = scratch.path(`export ${name}`);
    const { code, out } = await runCli(['export', run, '--to', `${folder}/${name}`]);
    expect(code).toBe(0);
    for (const file of files) {
      expect(existsSync(`${folder}/${file}`)).toBe(true);
      expect(out).toContain(file);
    }
    const back = await runCli(['compare', run, `${folder}/${name}`, '--json']);
    expect(JSON.parse(back.out).verdict).toBe(verdict);
  });

  test('says what the format cannot hold', async () => {
    const { out, err } = await runCli(['export', run, '--to', scratch.path('said.swc')]);
    expect(out).toContain('written: ');
    expect(err).toMatch(/note: \.swc holds no flows/);
    expect(await runCli(['export', run, '--to', scratch.path('said.swc'), '--quiet'])).toEqual({
      code: 0,
      out: '',
      err: '',
    });
  });

  test('refuses a folder, the file that is read, and an ending it does not know; leaves them as they were', async () => {
    mkdirSync(scratch.path('folder.swc'));
    writeFileSync(scratch.path('notes.json'), '{"mine": 1}');
    writeFileSync(scratch.path('half.nodes.csv'), 'mine\n');
    const before = readFileSync(scratch.path('run', 'tree.vtp'));
    for (const [to, says] of [
      [scratch.path('folder.swc'), /^--to: got .*which is a folder/],
      [scratch.path('run', 'tree.vtp'), /^--to: got .*the file that is read/],
      [scratch.path('other', 'tree.vtp'), /^--to: got .*which belongs to a run/],
      [scratch.path('other', 'spec.json'), /^--to: got .*which belongs to a run/],
      [scratch.path('other', 'report.json'), /^--to: got .*which belongs to a run/],
      [scratch.path('notes.json'), /^--to: got .*which is there and holds something else/],
      [scratch.path('half.csv'), /^--to: got .*half\.nodes\.csv, which is there and holds something else/],
      [scratch.path('a.dwg'), /^--to: got .*expected a name that ends in/],
      ['', /^--to: got/],
    ] as const) {
      const { code, err } = await runCli(['export', run, '--to', to]);
      expect(code).toBe(2);
      expect(err).toMatch(says);
    }
    expect(readFileSync(scratch.path('run', 'tree.vtp')).equals(before)).toBe(true);
    expect(readFileSync(scratch.path('notes.json'), 'utf8')).toBe('{"mine": 1}');
    expect((await runCli(['check', scratch.path('other')])).code).toBe(0);
  });

  test('replaces a tree of the same format', async () => {
    for (const name of ['again.json', 'again.csv']) {
      expect((await runCli(['export', other, '--to', scratch.path(name)])).code).toBe(0);
      expect((await runCli(['export', run, '--to', scratch.path(name)])).code).toBe(0);
      expect((await runCli(['compare', run, scratch.path(name)])).code).toBe(0);
    }
  });
});

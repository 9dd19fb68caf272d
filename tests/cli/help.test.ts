import { describe, expect, test } from 'vitest';
import { MESH_FORMATS, TREE_FORMATS, VERSION } from '../../src/index.ts';
import { runCli } from '../support/run-cli.ts';

const COMMANDS = ['grow', 'flow', 'mesh', 'export', 'check', 'compare', 'view', 'presets'];

describe('help', () => {
  test('lists every command and the exit codes: exit 0', async () => {
    const { code, out, err } = await runCli(['--help']);
    expect({ code, err }).toEqual({ code: 0, err: '' });
    for (const command of COMMANDS) expect(out).toMatch(new RegExp(`^  ${command} `, 'm'));
    expect(out).toMatch(/130 interrupted/);
  });

  test.each(COMMANDS)('of %s ends with an example of it', async (command) => {
    const { code, out } = await runCli([command, '--help']);
    expect(code).toBe(0);
    expect(out).toContain('--quiet');
    expect(out).toMatch(new RegExp(`Example:\n  \\$ vesselwright ${command}\\b[^]*$`));
  });

  test.each(COMMANDS.filter((command) => !['export', 'view'].includes(command)))(
    '%s prints JSON too',
    async (command) => {
      expect((await runCli([command, '--help'])).out).toContain('--json');
    },
  );

  test('of export says of every format which units it writes and what it drops', async () => {
    const { out } = await runCli(['export', '--help']);
    for (const { extensions, units, drops } of TREE_FORMATS) {
      expect(out).toContain(extensions[0]);
      expect(out).toContain(`units: ${units}`);
      expect(out).toContain(`drops: ${drops.length === 0 ? 'nothing' : drops.join(', ')}`);
    }
  });

  test.each(['mesh', 'export'])('of %s says so of every mesh format', async (command) => {
    const { out } = await runCli([command, '--help']);
    for (const { id, ending, units, drops } of MESH_FORMATS) {
      expect(out).toMatch(new RegExp(`^  ${id} +lumen${ending.replace('.', '\\.')}: `, 'm'));
      expect(out).toContain(`units: ${units}`);
      expect(out).toContain(`drops: ${drops.length === 0 ? 'nothing' : drops.join(', ')}`);
    }
  });

  test('--version', async () => {
    expect(await runCli(['--version'])).toEqual({ code: 0, out: `${VERSION}\n`, err: '' });
  });
});

describe('a command line that makes no sense', () => {
  test.each([
    [[], /Usage: vesselwright/],
    [['grwo', 'x'], /^vesselwright: unknown command 'grwo' \(Did you mean grow\?\)\n$/],
    [['batch', 'plan.json', '--out', 'x'], /^vesselwright: unknown command 'batch'\n$/],
    [['batch', '--help'], /^vesselwright: unknown command 'batch'\n$/],
    [['grow', 'gel-block', '--oot', 'x'], /^vesselwright: unknown option '--oot' \(Did you mean --out\?\)\n$/],
    [['mesh', 'x', '--oot', 'x'], /^vesselwright: unknown option '--oot'/],
    [['export', 'x'], /^vesselwright: required option '--to <file>' not specified\n$/],
    [['check', 'nothing'], /^nothing: got nothing, which does not exist, expected a run folder or a tree file\n$/],
    [['grow', 'gel-block', '--out', 'x', '--terminals', '20000001'], /expected a whole number from 1 to 20000000\n$/],
    [['grow'], /required option|missing required argument/],
    [['grow', 'gel-block'], /^vesselwright: required option '--out <run>' not specified\n$/],
    [['grow', 'gel-block', '--out', 'x', '--sed', '3'], /unknown option '--sed' \(Did you mean --seed\?\)/],
    [['compare', 'one'], /missing required argument 'B'/],
    [['check', 'a', 'b'], /too many arguments/],
    [['grow', 'gel-blok', '--out', 'x'], /^spec: got "gel-blok".*nearest preset is gel-block/],
    [['presets', 'loeb'], /^name: got "loeb".*nearest preset is lobe/],
    [['grow', 'gel-block', '--out', 'x', '--terminals', '1e3'], /^--terminals: got "1e3", expected a whole number/],
    [['grow', 'gel-block', '--out', 'x', '--terminals', '0'], /^--terminals: got "0"/],
    [
      ['grow', 'explicit-points', '--out', 'x', '--terminals', '5'],
      /^--terminals: got 5, but tree supply .* by points/,
    ],
    [['grow', 'gel-block', '--out', 'x', '--refine', '20'], /^--refine: got "20", expected none, quick/],
    [['grow', 'gel-block', '--out', 'x', '--refine', '0s'], /^--refine: got "0s"/],
    [['grow', 'gel-block', '--out', 'x', '--workers', 'all'], /^--workers: got "all"/],
    [['grow', 'gel-block', '--out', 'x', '--seed', ''], /^seed: got/],
    [['grow', 'gel-block', '--out', ''], /^--out: got an empty path/],
  ])('%j: exit 2', async (argv, says) => {
    const { code, out, err } = await runCli(argv);
    expect({ code, out }).toEqual({ code: 2, out: '' });
    expect(err).toMatch(says);
    expect(err).not.toMatch(/^\s+at .*:\d+:\d+/m);
  });
});

describe('presets', () => {
  test('are listed with what they are for', async () => {
    const { code, out } = await runCli(['presets']);
    expect(code).toBe(0);
    expect(out.trimEnd().split('\n')).toHaveLength(5);
    expect(out).toMatch(/^gel-block +The demo/m);
    const list = JSON.parse((await runCli(['presets', '--json'])).out);
    expect(list.map((one: { id: string }) => one.id)).toContain('bean');
    expect(list[0]).toMatchObject({ purpose: expect.any(String), path: expect.any(String) });
  });

  test('one is printed as it stands', async () => {
    const { code, out } = await runCli(['presets', 'lobe']);
    expect(code).toBe(0);
    expect(JSON.parse(out).name).toBe('three-part lobe');
  });
});

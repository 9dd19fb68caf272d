import { readFileSync, writeFileSync } from 'node:fs';
import { afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { buildProgram, PROGRAM, ProgramScratch, pause, ROOT } from '../support/program.ts';
import { tinySpec } from '../support/run-cli.ts';

/* The built program as its own process: exit codes, Ctrl-C, pipes. What it does while it writes: interrupted.slow.test.ts. */

let program: ProgramScratch;
beforeAll(buildProgram);
beforeEach(() => {
  program = new ProgramScratch();
});
afterEach(() => program.scratch.remove());

describe('exit codes of the real program', () => {
  test('0, 1 and 2, with output that waits for a slow reader', async () => {
    writeFileSync(program.scratch.path('spec.json'), tinySpec());
    expect(await program.run(['grow', 'spec.json', '--out', 'run'])).toMatchObject({ code: 0, err: '' });
    expect(await program.run(['check', 'run'])).toMatchObject({ code: 0 });
    await program.run(['grow', 'spec.json', '--seed', 'other', '--out', 'other']);
    const different = await program.run(['compare', 'run', 'other', '--json']);
    expect(different.code).toBe(1);
    expect(JSON.parse(different.out).verdict).toBe('different');
    expect(await program.run(['grow', 'nowhere.json', '--out', 'none'])).toEqual({
      code: 2,
      out: '',
      err: 'nowhere.json: got nowhere.json, which does not exist, expected a spec file\n',
    });
    expect(program.scratch.names()).toEqual(['other', 'run', 'spec.json']);
  });

  test('70 for a fault of ours: a stack, and a request to report it; nothing is written', async () => {
    writeFileSync(program.scratch.path('spec.json'), tinySpec());
    // A planted fault: the report cannot be turned into text.
    writeFileSync(
      program.scratch.path('plant.mjs'),
      'const own = JSON.stringify; JSON.stringify = (v, ...rest) => { if (v?.format_version) throw new Error("planted"); return own(v, ...rest); };',
    );
    const { code, err } = await program.run(['grow', 'spec.json', '--out', 'run'], {
      NODE_OPTIONS: `--import=${program.scratch.path('plant.mjs')}`,
    });
    expect(code).toBe(70);
    expect(err).toMatch(/^Error: planted\n\s+at /);
    expect(err).toMatch(/a fault of vesselwright .* Please report it/);
    expect(program.scratch.names()).toEqual(['plant.mjs', 'spec.json']);
  });

  test('a reader that goes away is no fault', async () => {
    const { child, ended } = program.start(['presets', 'bean']);
    child.stdout!.destroy();
    expect((await ended).err).toBe('');
  });
});

describe('interrupted', () => {
  test.each([0, 400])('by Ctrl-C after %i ms of work: 130, nothing left', async (ms) => {
    const { child, ended } = await program.startReady(['grow', 'gel-block', '--terminals', '200000', '--out', 'run']);
    await pause(ms);
    child.kill('SIGINT');
    const { code, out, err } = await ended;
    expect({ code, out, err }).toEqual({ code: 130, out: '', err: 'interrupted: nothing is half-written\n' });
    expect(program.scratch.names()).toEqual([]);
  });

  test('view by Ctrl-C, its normal end: 0', async () => {
    writeFileSync(program.scratch.path('spec.json'), tinySpec());
    await program.run(['grow', 'spec.json', '--out', 'run']);
    const { child, ended } = program.start(['view', 'run']);
    const address = await new Promise<string>((done) => {
      child.stdout!.once('data', (chunk) => done(String(chunk).split('\n')[0]!));
    });
    expect((await fetch(`${address}run/0/tree.vtp`)).status).toBe(200);
    child.kill('SIGINT');
    expect(await ended).toMatchObject({ code: 0, err: '' });
  });
});

test('the program may be run by its name: it starts with #! and is executable after a build', () => {
  expect(readFileSync(PROGRAM, 'utf8')).toMatch(/^#!\/usr\/bin\/env node\n/);
  const { bin, scripts } = JSON.parse(readFileSync(`${ROOT}package.json`, 'utf8'));
  expect(bin.vesselwright).toBe('dist/cli/main.js');
  expect(scripts.build).toContain("chmodSync('dist/cli/main.js'");
});

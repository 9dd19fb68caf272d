import { type ChildProcess, execFileSync, spawn } from 'node:child_process';
import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { makeScratch, type Scratch, tinySpec } from '../support/run-cli.ts';

/* The built program as its own process: exit codes, Ctrl-C, kill, pipes. */

const ROOT = fileURLToPath(new URL('../../', import.meta.url));
const PROGRAM = `${ROOT}dist/cli/main.js`;

let scratch: Scratch;
beforeAll(() => {
  execFileSync(process.execPath, [`${ROOT}node_modules/typescript/bin/tsc`, '-b', 'src', 'src/node', 'src/cli'], {
    cwd: ROOT,
    stdio: 'inherit',
  });
});
beforeEach(() => {
  scratch = makeScratch();
});
afterEach(() => scratch.remove());

interface Ended {
  readonly code: number | null;
  readonly out: string;
  readonly err: string;
}

function start(
  argv: readonly string[],
  env: Record<string, string> = {},
): { child: ChildProcess; ended: Promise<Ended> } {
  const child = spawn(process.execPath, [PROGRAM, ...argv], { cwd: scratch.folder, env: { ...process.env, ...env } });
  let out = '';
  let err = '';
  child.stdout!.on('data', (chunk) => {
    out += chunk;
  });
  child.stderr!.on('data', (chunk) => {
    err += chunk;
  });
  const ended = new Promise<Ended>((done) => child.on('close', (code) => done({ code, out, err })));
  return { child, ended };
}

/** Written by the worker thread as it begins, into a file of the scratch folder. */
const READY = 'ready.mjs';
const TELL = `
import { writeFileSync } from 'node:fs';
import { isMainThread } from 'node:worker_threads';
if (!isMainThread) writeFileSync(new URL('./began', import.meta.url), '');
`;

/**
 * Starts the program and comes back once its worker thread begins: until then Ctrl-C ends a process of Node's by the
 * signal alone, and a busy machine needs a while to get that far.
 */
async function startReady(argv: readonly string[]): Promise<{ child: ChildProcess; ended: Promise<Ended> }> {
  writeFileSync(scratch.path(READY), TELL);
  const started = start(argv, { NODE_OPTIONS: `--import=${scratch.path(READY)}` });
  await appears(/^began$/, started.child);
  rmSync(scratch.path('began'));
  rmSync(scratch.path(READY));
  return started;
}

const run = (argv: readonly string[], env: Record<string, string> = {}): Promise<Ended> => start(argv, env).ended;
const pause = (ms: number): Promise<void> => new Promise((done) => setTimeout(done, ms));

/** Waits until a name in the scratch folder fits; false where the process ended first. */
async function appears(pattern: RegExp, child: ChildProcess): Promise<boolean> {
  while (child.exitCode === null && child.signalCode === null) {
    if (scratch.names().some((name) => pattern.test(name))) return true;
    await pause(1);
  }
  return false;
}

describe('exit codes of the real program', () => {
  test('0, 1 and 2, with output that waits for a slow reader', async () => {
    writeFileSync(scratch.path('spec.json'), tinySpec());
    expect(await run(['grow', 'spec.json', '--out', 'run'])).toMatchObject({ code: 0, err: '' });
    expect(await run(['check', 'run'])).toMatchObject({ code: 0 });
    await run(['grow', 'spec.json', '--seed', 'other', '--out', 'other']);
    const different = await run(['compare', 'run', 'other', '--json']);
    expect(different.code).toBe(1);
    expect(JSON.parse(different.out).verdict).toBe('different');
    expect(await run(['grow', 'nowhere.json', '--out', 'none'])).toEqual({
      code: 2,
      out: '',
      err: 'nowhere.json: got nowhere.json, which does not exist, expected a spec file\n',
    });
    expect(scratch.names()).toEqual(['other', 'run', 'spec.json']);
  });

  test('70 for a fault of ours: a stack, and a request to report it; nothing is written', async () => {
    writeFileSync(scratch.path('spec.json'), tinySpec());
    // A planted fault: the report cannot be turned into text.
    writeFileSync(
      scratch.path('plant.mjs'),
      'const own = JSON.stringify; JSON.stringify = (v, ...rest) => { if (v?.format_version) throw new Error("planted"); return own(v, ...rest); };',
    );
    const { code, err } = await run(['grow', 'spec.json', '--out', 'run'], {
      NODE_OPTIONS: `--import=${scratch.path('plant.mjs')}`,
    });
    expect(code).toBe(70);
    expect(err).toMatch(/^Error: planted\n\s+at /);
    expect(err).toMatch(/a fault of vesselwright .* Please report it/);
    expect(scratch.names()).toEqual(['plant.mjs', 'spec.json']);
  });

  test('a reader that goes away is no fault', async () => {
    const { child, ended } = start(['presets', 'bean']);
    child.stdout!.destroy();
    expect((await ended).err).toBe('');
  });
});

describe('interrupted', () => {
  test.each([0, 50, 400, 1100])('by Ctrl-C after %i ms of work: 130, nothing left', async (ms) => {
    const { child, ended } = await startReady(['grow', 'gel-block', '--terminals', '200000', '--out', 'run']);
    await pause(ms);
    child.kill('SIGINT');
    const { code, out, err } = await ended;
    expect({ code, out, err }).toEqual({ code: 130, out: '', err: 'interrupted: nothing is half-written\n' });
    expect(scratch.names()).toEqual([]);
  });

  test.each([0, 2, 5, 10, 20])('by Ctrl-C %i ms into writing: the run is whole or not there', async (ms) => {
    const { child, ended } = start(['grow', 'gel-block', '--terminals', '500', '--refine', 'none', '--out', 'run']);
    await appears(/\.partial$/, child);
    await pause(ms);
    child.kill('SIGINT');
    const { code } = await ended;
    expect([0, 130]).toContain(code);
    // Nothing hidden is left, and a run is there only with all its files.
    expect(scratch.names()).toEqual(existsSync(scratch.path('run')) ? ['run'] : []);
    if (code === 0) expect(existsSync(scratch.path('run'))).toBe(true);
    if (existsSync(scratch.path('run'))) {
      expect(readdirSync(scratch.path('run')).sort()).toEqual(['report.html', 'report.json', 'spec.json', 'tree.vtp']);
      expect((await run(['check', 'run'])).code).toBe(0);
    }
  });

  test('by Ctrl-C while an older run is replaced: one of the two is there, whole', async () => {
    const argv = ['gel-block', '--terminals', '200', '--refine', 'none', '--out', 'run'];
    await run(['grow', ...argv, '--seed', 'old']);
    for (const ms of [0, 1, 3, 6]) {
      const { child, ended } = start(['grow', ...argv, '--seed', `new ${ms}`]);
      await appears(/\.partial$/, child);
      await pause(ms);
      child.kill('SIGINT');
      expect([0, 130]).toContain((await ended).code);
      expect(scratch.names()).toEqual(['run']);
      expect((await run(['check', 'run'])).code).toBe(0);
    }
  });

  test('by kill -9: no half-made run, and the next run clears what was left', async () => {
    const argv = ['grow', 'gel-block', '--terminals', '500', '--refine', 'none', '--out', 'run'];
    let caught = false;
    // A busy machine may sleep through the moment of writing.
    for (let tries = 0; tries < 5 && !caught; tries++) {
      const { child, ended } = start(argv);
      caught = await appears(/\.partial$/, child);
      child.kill('SIGKILL');
      await ended;
    }
    expect(caught).toBe(true);
    if (existsSync(scratch.path('run'))) expect((await run(['check', 'run'])).code).toBe(0);
    expect(await run(argv)).toMatchObject({ code: 0 });
    expect(scratch.names()).toEqual(['run']);
  });

  test('view by Ctrl-C, its normal end: 0', async () => {
    writeFileSync(scratch.path('spec.json'), tinySpec());
    await run(['grow', 'spec.json', '--out', 'run']);
    const { child, ended } = start(['view', 'run']);
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

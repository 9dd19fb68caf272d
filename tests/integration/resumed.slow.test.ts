import { existsSync, readFileSync, statSync, truncateSync, writeFileSync } from 'node:fs';
import { afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { randomStream } from '../../src/core/random.ts';
import { buildProgram, type Ended, ProgramScratch, pause } from '../support/program.ts';

/* Runs that Ctrl-C or a kill ends at any moment, gone on with by --resume. */

let program: ProgramScratch;
beforeAll(buildProgram);
beforeEach(() => {
  program = new ProgramScratch();
});
afterEach(() => program.scratch.remove());

/** Every moment that could be saved is. */
const OFTEN = { VESSELWRIGHT_SNAPSHOT_SECONDS: '0' };

const TOLD = 'interrupted: nothing is half-written; the same command with --resume goes on from cut.snapshot\n';

/** Starts a command line and ends it by a signal some time after a name has appeared, unless it ends before. */
async function cut(argv: readonly string[], name: RegExp, ms: number, signal: NodeJS.Signals): Promise<Ended> {
  const { child, ended } = program.start(argv, OFTEN);
  await program.appears(name, child);
  const over = await Promise.race([ended, pause(ms)]);
  if (over === undefined) child.kill(signal);
  return ended;
}

/** Runs gone on with, and interruptions that told of it, over all cases. */
let resumptions = 0;
let told = 0;

describe.each([
  ['gel-block', '1000', 'quick'],
  ['gel-block', '600', 'thorough'],
  ['lobe', '600', 'thorough'],
  ['hollow-wall', '200', 'annealed'],
])('%s with %s terminals, refined %s', (preset, terminals, refine) => {
  const argv = ['grow', preset, '--terminals', terminals, '--refine', refine];

  test('interrupted at five random moments, gone on with and interrupted again: the same bytes', async () => {
    const { scratch } = program;
    const begin = performance.now();
    expect((await program.run([...argv, '--out', 'whole'])).code).toBe(0);
    const whole = readFileSync(scratch.path('whole', 'tree.vtp'));
    const takes = performance.now() - begin;
    const random = randomStream('moments', argv.join(' '));
    for (let k = 0; k < 5; k++) {
      // Every other time by a kill, which asks nobody.
      const signal = k % 2 === 0 ? 'SIGINT' : 'SIGKILL';
      // The first at any time, the others at times when there is something to go on from.
      const name = k === 0 ? /./ : /^cut\.snapshot$/;
      let ended = await cut([...argv, '--out', 'cut'], name, 0.7 * random.next() * takes, signal);
      for (let again = 0; ended.code !== 0; again++) {
        const saved = existsSync(scratch.path('cut.snapshot'));
        if (ended.code === 130) {
          // A run that is interrupted before its thread has begun does not know of a snapshot.
          expect(['interrupted: nothing is half-written\n', ...(saved ? [TOLD] : [])]).toContain(ended.err);
          if (ended.err === TOLD) told++;
        }
        if (saved) resumptions++;
        const next = saved ? [...argv, '--out', 'cut', '--resume'] : [...argv, '--out', 'cut'];
        ended = again < 1 ? await cut(next, name, random.next() * takes, signal) : await program.run(next, OFTEN);
      }
      expect(scratch.names()).toEqual(['cut', 'whole']);
      expect([k, readFileSync(scratch.path('cut', 'tree.vtp')).equals(whole)]).toEqual([k, true]);
      scratch.clear('cut');
    }
  });
});

// When a signal falls is a matter of how busy the machine is, so what must have been met is asked of all moments together.
test('some of those moments fell where there was a snapshot to go on from, and some were told so', () => {
  expect(resumptions).toBeGreaterThan(6);
  expect(told).toBeGreaterThan(0);
});

describe('a snapshot that is of no use', () => {
  const argv = ['grow', 'gel-block', '--terminals', '2000', '--out', 'run'];

  async function leaveSnapshot(): Promise<string> {
    const { child, ended } = program.start(argv, OFTEN);
    await program.appears(/^run\.snapshot$/, child);
    child.kill('SIGINT');
    expect((await ended).code).toBe(130);
    return program.scratch.path('run.snapshot');
  }

  test('broken, cut short, of another run, missing: refused, told, nothing written', async () => {
    const path = await leaveSnapshot();
    const bytes = readFileSync(path);
    const resumed = async (...more: string[]) => {
      const { code, err } = await program.run([...argv, '--resume', ...more]);
      expect(program.scratch.names()).toEqual(existsSync(path) ? ['run.snapshot'] : []);
      return `${code} ${err}`;
    };
    expect(await resumed('--seed', 'other')).toMatch(/^2 run\.snapshot: got a snapshot of another spec, seed/);
    truncateSync(path, statSync(path).size - 4096);
    expect(await resumed()).toMatch(/^2 run\.snapshot: got a snapshot that is broken or cut short/);
    bytes[bytes.length >> 1]! ^= 1;
    writeFileSync(path, bytes);
    expect(await resumed()).toMatch(/^2 run\.snapshot: got a snapshot that is broken or cut short/);
    program.scratch.clear('run.snapshot');
    expect(await resumed()).toMatch(/^2 --resume: got no snapshot run\.snapshot/);
  });

  test('of a run that is not gone on with: told, and gone when the new run is done', async () => {
    await leaveSnapshot();
    const { code, err } = await program.run(argv);
    expect([code, err]).toEqual([
      0,
      'note: run.snapshot of an interrupted run is there; this run begins anew all the same\n',
    ]);
    expect(program.scratch.names()).toEqual(['run']);
  });
});

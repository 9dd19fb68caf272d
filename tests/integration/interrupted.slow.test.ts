import { existsSync, readdirSync } from 'node:fs';
import { afterEach, beforeAll, beforeEach, describe, expect, test } from 'vitest';
import { buildProgram, ProgramScratch, pause } from '../support/program.ts';

/* Ctrl-C and kill at the moments that hurt: while a run is written, and while one replaces another. */

let program: ProgramScratch;
beforeAll(buildProgram);
beforeEach(() => {
  program = new ProgramScratch();
});
afterEach(() => program.scratch.remove());

describe('interrupted while it writes', () => {
  test.each([0, 2, 5, 10, 20])('by Ctrl-C %i ms into writing: the run is whole or not there', async (ms) => {
    const { child, ended } = program.start([
      'grow',
      'gel-block',
      '--terminals',
      '500',
      '--refine',
      'none',
      '--out',
      'run',
    ]);
    await program.appears(/\.partial$/, child);
    await pause(ms);
    child.kill('SIGINT');
    const { code } = await ended;
    expect([0, 130]).toContain(code);
    // Nothing hidden is left, and a run is there only with all its files.
    expect(program.scratch.names()).toEqual(existsSync(program.scratch.path('run')) ? ['run'] : []);
    if (code === 0) expect(existsSync(program.scratch.path('run'))).toBe(true);
    if (existsSync(program.scratch.path('run'))) {
      expect(readdirSync(program.scratch.path('run')).sort()).toEqual([
        'report.html',
        'report.json',
        'spec.json',
        'tree.vtp',
      ]);
      expect((await program.run(['check', 'run'])).code).toBe(0);
    }
  });

  test('by Ctrl-C while an older run is replaced: one of the two is there, whole', async () => {
    const argv = ['gel-block', '--terminals', '200', '--refine', 'none', '--out', 'run'];
    await program.run(['grow', ...argv, '--seed', 'old']);
    for (const ms of [0, 1, 3, 6]) {
      const { child, ended } = program.start(['grow', ...argv, '--seed', `new ${ms}`]);
      await program.appears(/\.partial$/, child);
      await pause(ms);
      child.kill('SIGINT');
      expect([0, 130]).toContain((await ended).code);
      expect(program.scratch.names()).toEqual(['run']);
      expect((await program.run(['check', 'run'])).code).toBe(0);
    }
  });

  test('by kill -9: no half-made run, and the next run clears what was left', async () => {
    const argv = ['grow', 'gel-block', '--terminals', '500', '--refine', 'none', '--out', 'run'];
    let caught = false;
    // A busy machine may sleep through the moment of writing.
    for (let tries = 0; tries < 5 && !caught; tries++) {
      const { child, ended } = program.start(argv);
      caught = await program.appears(/\.partial$/, child);
      child.kill('SIGKILL');
      await ended;
    }
    expect(caught).toBe(true);
    if (existsSync(program.scratch.path('run'))) expect((await program.run(['check', 'run'])).code).toBe(0);
    expect(await program.run(argv)).toMatchObject({ code: 0 });
    expect(program.scratch.names()).toEqual(['run']);
  });
});

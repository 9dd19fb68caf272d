import { existsSync, mkdirSync, readdirSync, writeFileSync } from 'node:fs';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import type { StateOut } from '../../../src/core/state.ts';
import { InputError } from '../../../src/index.ts';
import { SnapshotFile, type SnapshotOptions, snapshotPath, workOf } from '../../../src/node/snapshot-file.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import { soundSpec } from '../../support/bend-spec.ts';
import { makeScratch, type Scratch } from '../../support/run-cli.ts';

let scratch: Scratch;
beforeEach(() => {
  scratch = makeScratch();
});
afterEach(() => scratch.remove());

const HEAD = workOf(specFromValue(soundSpec()), new Map(), false);
const save = (out: StateOut) => out.list('numbers', 'f64', [1, 2]);

function open(options: Partial<SnapshotOptions>, head = HEAD): SnapshotFile {
  return new SnapshotFile(scratch.path('run'), head, { every: 0, resume: false, ...options }, { where: '--out' });
}

describe('the snapshot of a run', () => {
  test('lies beside the run’s folder', () => {
    expect(['runs/a', 'runs/a/', 'a.b'].map(snapshotPath)).toEqual([
      'runs/a.snapshot',
      'runs/a.snapshot',
      'a.b.snapshot',
    ]);
  });

  test('is written when it is due, and not before', () => {
    const places: string[] = [];
    open({ every: 1000 }).onMoment(save);
    expect(scratch.names()).toEqual([]);
    open({ onPlace: (path) => places.push(path) }).onMoment(save);
    expect(scratch.names()).toEqual(['run.snapshot']);
    expect(places).toEqual([scratch.path('run.snapshot')]);
  });

  test('is gone on with, with the time that was spent, and removed', () => {
    open({ clock: { spent: () => 12.5, goOn: () => {} } }).onMoment(save);
    let spent = 0;
    const clock = { spent: () => 0, goOn: (before: number) => (spent = before) };
    const file = open({ resume: true, clock });
    expect(file.withSaved((saved) => [...saved!.reals('numbers')])).toEqual([1, 2]);
    expect(spent).toBe(12.5);
    file.remove();
    expect(scratch.names()).toEqual([]);
    expect(open({}).withSaved((saved) => saved)).toBeUndefined();
  });

  test('is refused where it is missing, a folder, no snapshot, or of other work', () => {
    const resume = (head = HEAD) => {
      try {
        return open({ resume: true }, head).withSaved(() => 'gone on');
      } catch (error) {
        if (error instanceof InputError) return error.faults[0]!.message;
        throw error;
      }
    };
    expect(resume()).toMatch(/got no snapshot/);
    mkdirSync(scratch.path('run.snapshot'));
    expect(resume()).toMatch(/got no snapshot/);
    scratch.clear('run.snapshot');
    writeFileSync(scratch.path('run.snapshot'), 'something else');
    expect(resume()).toMatch(/no snapshot or is cut short/);
    open({}).onMoment(save);
    expect(resume()).toBe('gone on');
    const other = [
      workOf(specFromValue({ ...soundSpec(), seed: 'other' }), new Map(), false),
      workOf(specFromValue(soundSpec()), new Map([['a.stl', Uint8Array.of(1)]]), false),
      workOf(specFromValue(soundSpec()), new Map(), true),
    ];
    for (const head of other) expect(resume(head)).toMatch(/got a snapshot of another spec, seed, surface or budget/);
  });

  test('that cannot be written is told once, and the run goes on', () => {
    const told: string[] = [];
    mkdirSync(scratch.path('run.snapshot'));
    const file = open({ onTrouble: (why) => told.push(why) });
    file.onMoment(save);
    file.onMoment(save);
    expect(told).toEqual([expect.stringMatching(/^no snapshot can be written: .*which is a folder/)]);
    expect(existsSync(scratch.path('run.snapshot'))).toBe(true);
    expect(readdirSync(scratch.path('run.snapshot'))).toEqual([]);
  });
});

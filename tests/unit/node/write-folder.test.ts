import { existsSync, mkdirSync, readFileSync, symlinkSync, writeFileSync } from 'node:fs';
import { hostname } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { InputError } from '../../../src/index.ts';
import { MESH_FOLDER, RUN_FOLDER, writeFiles, writeFolder } from '../../../src/node/index.ts';
import { makeScratch, type Scratch } from '../../support/run-cli.ts';

let scratch: Scratch;
beforeEach(() => {
  scratch = makeScratch();
});
afterEach(() => scratch.remove());

const RUN = ['tree.vtp', 'report.json', 'spec.json', 'report.html'];
const runFiles = (content: string) => RUN.map((name) => ({ name, content }));
const WRITING = { where: '--out' };
/** A process id that no process has: above the largest Linux gives out. */
const GONE = 4_194_305;
const HOST = hostname().replaceAll(/[^A-Za-z0-9]/g, '') || 'host';

function refusal(step: () => void): string {
  try {
    step();
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  throw new Error('nothing was refused');
}

describe('writeFolder', () => {
  test('makes the folders above, and leaves nothing but the folder', () => {
    writeFolder(scratch.path('a', 'b', 'run'), RUN_FOLDER, runFiles('x'), WRITING);
    expect(readFileSync(scratch.path('a', 'b', 'run', 'spec.json'), 'utf8')).toBe('x');
    expect(scratch.names()).toEqual(['a']);
  });

  test('replaces an empty folder and a run, with its copied surfaces', () => {
    mkdirSync(scratch.path('run'));
    const spec = JSON.stringify({
      tissue: { shape: 'surface', file: 'bean.stl', unit: 'mm' },
      trees: [{ inlet: { position_mm: [0, 0, 0], flow_mL_min: 1 }, terminals: { count: 3 } }],
    });
    const files = [...runFiles(spec), { name: 'bean.stl', content: 'solid' }];
    writeFolder(scratch.path('run'), RUN_FOLDER, files, WRITING);
    writeFolder(scratch.path('run'), RUN_FOLDER, runFiles('second'), WRITING);
    expect(readFileSync(scratch.path('run', 'tree.vtp'), 'utf8')).toBe('second');
    expect(existsSync(scratch.path('run', 'bean.stl'))).toBe(false);
    expect(scratch.names()).toEqual(['run']);
  });

  test('writes through a link to a folder', () => {
    mkdirSync(scratch.path('real'));
    symlinkSync(scratch.path('real'), scratch.path('link'));
    writeFolder(scratch.path('link'), RUN_FOLDER, runFiles('x'), WRITING);
    expect(existsSync(scratch.path('real', 'tree.vtp'))).toBe(true);
    expect(scratch.names()).toEqual(['link', 'real']);
  });

  test.each([
    ['a file of the user’s beside a run’s', [...RUN, 'notes.txt'], /it holds notes\.txt/],
    ['a folder with a spec of the user’s alone', ['spec.json'], /it holds spec\.json/],
    ['a folder of many files', ['a', 'b', 'c', 'd', 'e'], /it holds a, b, c and 2 more/],
    ['a mesh folder', ['lumen.stl', 'mesh.json', 'boundary.csv'], /which is no run/],
  ])('refuses %s and leaves it as it was', (_, names, says) => {
    mkdirSync(scratch.path('out'));
    for (const name of names) writeFileSync(scratch.path('out', name), 'mine');
    expect(refusal(() => writeFolder(scratch.path('out'), RUN_FOLDER, runFiles('x'), WRITING))).toMatch(says);
    for (const name of names) expect(readFileSync(scratch.path('out', name), 'utf8')).toBe('mine');
    expect(scratch.names()).toEqual(['out']);
  });

  test('refuses a file, the folder one works in, a name too long, and a place below a file', () => {
    writeFileSync(scratch.path('file'), '');
    const to = (out: string) => refusal(() => writeFolder(out, MESH_FOLDER, [], WRITING));
    expect(to(scratch.path('file'))).toMatch(/^--out: got .*which is a file/);
    expect(to('.')).toMatch(/^--out: got \., which holds the folder you work in/);
    expect(to('..')).toMatch(/which holds the folder you work in/);
    expect(to('')).toMatch(/^--out: got an empty path/);
    expect(to(scratch.path('n'.repeat(300)))).toMatch(/a name that is too long/);
    expect(to(scratch.path('file', 'below'))).toMatch(/^--out: got .*, expected/);
    expect(scratch.names()).toEqual(['file']);
  });

  test('what fails half-way leaves nothing, not even the folders above', () => {
    // A folder cannot be made where a file is.
    const files = [...runFiles('x'), { name: 'tree.vtp/inside', content: 'x' }];
    refusal(() => writeFolder(scratch.path('a', 'b', 'run'), RUN_FOLDER, files, WRITING));
    expect(scratch.names()).toEqual([]);
  });

  test('makes folders inside, and keeps one in which something else has come to lie', () => {
    const files = [
      ...['lumen.stl', 'mesh.json', 'openfoam/run.sh', 'openfoam/0/U'].map((name) => ({ name, content: name })),
    ];
    const place = scratch.path('mesh');
    writeFolder(place, MESH_FOLDER, files, WRITING);
    expect(readFileSync(join(place, 'openfoam/0/U'), 'utf8')).toBe('openfoam/0/U');
    writeFolder(place, MESH_FOLDER, files.slice(0, 3), WRITING);
    expect(existsSync(join(place, 'openfoam/0'))).toBe(false);
    writeFileSync(join(place, 'openfoam/result'), 'x');
    expect(refusal(() => writeFolder(place, MESH_FOLDER, files, WRITING))).toMatch(/holds openfoam\/result\)/);
    expect(readFileSync(join(place, 'openfoam/result'), 'utf8')).toBe('x');
  });

  test('tells of the temporary folder before it is there, and commits with both names in place', () => {
    const told: string[] = [];
    let committed = 0;
    writeFolder(scratch.path('run'), RUN_FOLDER, runFiles('x'), {
      where: '--out',
      temporary: (path) => {
        if (told.length === 0) expect(existsSync(path)).toBe(false);
        told.push(path);
      },
      commit: (step) => {
        expect(scratch.names()).toHaveLength(1);
        expect(existsSync(scratch.path('run'))).toBe(false);
        step();
        committed++;
        expect(scratch.names()).toEqual(['run']);
      },
    });
    expect(committed).toBe(1);
    expect(told[0]).toMatch(/\.run\..*\.partial$/);
  });

  test('clears what a killed process left, and gives an older result its place back', () => {
    const left = (ending: string) => scratch.path(`.run.${HOST}-${GONE}-0.${ending}`);
    mkdirSync(left('partial'));
    writeFileSync(`${left('partial')}/tree.vtp`, 'half');
    mkdirSync(left('old'));
    for (const name of [...RUN, 'notes.txt']) writeFileSync(`${left('old')}/${name}`, 'older');
    // Of a process that lives, of another machine, of another place: not ours to remove.
    const others = [
      `.run.${HOST}-${process.ppid}-0.partial`,
      `.run.elsewhere-${GONE}-0.partial`,
      `.run2.${HOST}-${GONE}-0.partial`,
    ];
    for (const name of others) mkdirSync(scratch.path(name));
    // The older result holds a file of the user's, so it is put back and then refused.
    expect(refusal(() => writeFolder(scratch.path('run'), RUN_FOLDER, runFiles('x'), WRITING))).toMatch(/notes\.txt/);
    expect(readFileSync(scratch.path('run', 'tree.vtp'), 'utf8')).toBe('older');
    expect(scratch.names()).toEqual([...others, 'run'].sort());
  });
});

describe('writeFiles', () => {
  test('writes several files as one, replaces what is there, makes folders above', () => {
    mkdirSync(scratch.path('a'));
    writeFileSync(scratch.path('a', 'one'), 'old');
    const files = ['one', 'two'].map((name) => ({ path: scratch.path('a', name), content: name }));
    writeFiles([...files, { path: scratch.path('b', 'c', 'three'), content: 'three' }], { where: '--to' });
    expect(readFileSync(scratch.path('a', 'one'), 'utf8')).toBe('one');
    expect(readFileSync(scratch.path('b', 'c', 'three'), 'utf8')).toBe('three');
  });

  test('where one cannot be written, none is', () => {
    writeFileSync(scratch.path('one'), 'old');
    mkdirSync(scratch.path('folder'));
    const files = [
      { path: scratch.path('one'), content: 'new' },
      { path: scratch.path('made', 'two'), content: 'new' },
      { path: scratch.path('folder'), content: 'new' },
    ];
    expect(refusal(() => writeFiles(files, { where: '--to' }))).toMatch(/^--to: got .*folder, which is a folder/);
    expect(readFileSync(scratch.path('one'), 'utf8')).toBe('old');
    expect(scratch.names()).toEqual(['folder', 'one']);
  });
});

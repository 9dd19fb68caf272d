import { existsSync, mkdirSync, readFileSync, writeFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { makeScratch, runCli, type Scratch, tinySpec } from '../support/run-cli.ts';

let scratch: Scratch;
beforeAll(async () => {
  scratch = makeScratch();
  writeFileSync(scratch.path('spec.json'), tinySpec());
  await runCli(['grow', scratch.path('spec.json'), '--out', scratch.path('run')]);
});
afterAll(() => scratch.remove());

/** Files that are no trees, by what is done to a sound `tree.vtp`. */
const BROKEN: readonly (readonly [string, string, (sound: Buffer) => Buffer | string])[] = [
  ['empty', 'tree.vtp', () => ''],
  ['noise', 'tree.vtp', () => Buffer.from(Array.from({ length: 3000 }, (_, i) => (i * 7919) % 251))],
  ['cut in the middle', 'tree.vtp', (sound) => sound.subarray(0, sound.length / 2)],
  ['cut by one', 'tree.vtp', (sound) => sound.subarray(0, sound.length - 60)],
  ['without its lines', 'tree.vtp', (sound) => sound.toString('latin1').replaceAll('Lines', 'Limes')],
  ['an image grid', 'tree.vtp', (sound) => sound.toString('latin1').replaceAll('PolyData', 'ImageData')],
  ['empty', 'tree.json', () => ''],
  ['half of a document', 'tree.json', () => '{"nodes": ['],
  ['a spec', 'tree.json', () => tinySpec()],
  ['a list', 'tree.json', () => '[]'],
  ['empty', 'tree.swc', () => ''],
  ['words', 'tree.swc', () => 'this is no neuron\n'],
  ['a sample without radius', 'tree.swc', () => '1 5 0 0 0 1 -1\n2 5 0 0 9 x 1\n'],
  ['a ring', 'tree.swc', () => '1 5 0 0 0 1 2\n2 5 0 0 9 1 1\n'],
];

const COMMANDS: readonly (readonly [string, (tree: string, out: string) => string[]])[] = [
  ['check', (tree) => ['check', tree]],
  ['compare, first', (tree) => ['compare', tree, scratch.path('run')]],
  ['compare, second', (tree) => ['compare', scratch.path('run'), tree]],
  ['export', (tree, out) => ['export', tree, '--to', `${out}.csv`]],
  ['flow', (tree, out) => ['flow', tree, '--out', out]],
  ['mesh', (tree, out) => ['mesh', tree, '--out', out]],
  ['view', (tree) => ['view', tree]],
];

async function refuse(argv: string[], folder: string): Promise<string> {
  const { code, out, err } = await runCli(argv);
  expect(code, err).toBe(2);
  expect(out).toBe('');
  expect(err).not.toMatch(/^\s+at .*:\d+:\d+/m);
  expect(err.trim()).not.toBe('');
  for (const line of err.trimEnd().split('\n')) expect(line).toMatch(/^\S.*: .+/);
  for (const name of ['out', 'out.csv', 'out.nodes.csv']) expect(existsSync(`${folder}/${name}`), name).toBe(false);
  return err;
}

describe.each(COMMANDS)('%s refuses', (command, argv) => {
  test.each(BROKEN)('%s, as %s', async (name, file, bend) => {
    const folder = scratch.path(`${command} ${name} ${file}`);
    mkdirSync(folder);
    writeFileSync(`${folder}/${file}`, bend(readFileSync(scratch.path('run', 'tree.vtp'))), 'latin1');
    const err = await refuse(argv(`${folder}/${file}`, `${folder}/out`), folder);
    expect(err).toContain(file);
  });

  test('a path where nothing is', async () => {
    const folder = scratch.path(`${command} nothing`);
    const err = await refuse(argv(`${folder}/nothing.vtp`, `${folder}/out`), folder);
    expect(err).toMatch(/nothing\.vtp: got .*nothing\.vtp, which does not exist/);
    expect(existsSync(folder)).toBe(false);
  });

  test('an ending that no reader knows', async () => {
    const folder = scratch.path(`${command} ending`);
    mkdirSync(folder);
    writeFileSync(`${folder}/tree.docx`, 'PK');
    expect(await refuse(argv(`${folder}/tree.docx`, `${folder}/out`), folder)).toMatch(/ends in \.vtp, \.csv/);
  });

  test('a folder that holds no tree', async () => {
    const folder = scratch.path(`${command} empty folder`);
    mkdirSync(folder);
    expect(await refuse(argv(folder, `${folder}/out`), folder)).toMatch(/a folder without a tree\.vtp/);
  });
});

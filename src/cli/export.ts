import { existsSync, readFileSync, realpathSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import type { Command } from 'commander';
import { InputError, inputError, splitTreePath, TREE_FORMATS, type TreeFormat } from '../index.ts';
import { placeForFile, RUN_FOLDER, readTree, withFiles, writeFiles } from '../node/index.ts';
import { addCommonOptions, addExample, addRequired, type Context, runWork, TREE_ENDINGS } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';

interface ExportArguments extends CommonOptions {
  readonly to: string;
}

export function addExport(program: Command, context: Context): void {
  const command = program
    .command('export')
    .summary('write a tree in another format')
    .description('Writes a tree in the format that the file’s extension names.')
    .argument('<tree>', `run folder or tree file (${TREE_ENDINGS})`);
  addRequired(
    command,
    '--to <file>',
    `file to write: ${TREE_FORMATS.flatMap((format) => format.extensions).join(', ')}`,
  );
  addCommonOptions(command, null);
  command.addHelpText('after', `\nFormats:\n${describeFormats()}`);
  addExample(command, 'export runs/gel --to gel.csv', 'export runs/gel --to gel.swc');
  command.action((tree: string, options: ExportArguments) =>
    runWork(context, options, (talk) => exportTree(tree, options, talk)),
  );
}

/** What each format is, the unit it writes and what it cannot hold. */
function describeFormats(): string {
  return TREE_FORMATS.map(({ extensions, parts, title, units, drops }) => {
    const files = parts.length === 1 ? '' : `\n        files: ${parts.map((part) => `*${part}`).join(' and ')}`;
    const lost = drops.length === 0 ? 'nothing' : drops.join(', ');
    return `  ${extensions.join(' ').padEnd(5)} ${title}${files}\n        units: ${units}\n        drops: ${lost}\n`;
  }).join('');
}

function exportTree(path: string, options: ExportArguments, talk: Talk): number {
  const { format, files, stem } = splitTreePath(options.to, '--to');
  for (const file of files) placeForFile(file, '--to');
  const tree = readTree(path);
  for (const note of tree.notes) talk.note(note);
  const sources = tree.files.map(({ name }) => realpathSync(join(tree.folder, name)));
  const taken = files.find((file) => existsSync(file) && sources.includes(realpathSync(file)));
  if (taken !== undefined) {
    throw inputError('file', '--to', `got ${taken}, the file that is read, expected another`);
  }
  for (const file of files) refuseRunFile(file);
  if (files.some((file) => existsSync(file))) refuseOther(format, files);
  const encoded = format.encode(tree.record).map((file, k) => ({
    path: files[k] ?? stem + file.suffix,
    content: file.pieces ?? file.bytes,
  }));
  writeFiles(encoded, talk.writing('--to'));
  talk.say(`written: ${encoded.map((file) => file.path).join(', ')}`);
  if (format.drops.length > 0) talk.note(`${format.extensions[0]} holds no ${format.drops.join(', no ')}`);
  return EXIT.held;
}

/** A run's own files say one thing together; none of them is replaced alone. */
function refuseRunFile(file: string): void {
  const own = [...RUN_FOLDER.marks, ...RUN_FOLDER.others];
  const place = existsSync(file) ? realpathSync(file) : resolve(file);
  const isRun = RUN_FOLDER.marks.every((mark) => existsSync(join(dirname(place), mark)));
  if (!isRun || !own.includes(basename(place))) return;
  throw inputError('file', '--to', `got ${file}, which belongs to a run, expected another name or folder`);
}

/** Files that lie there are replaced only where they are a tree of the format that is written. */
function refuseOther(format: TreeFormat, files: readonly string[]): void {
  try {
    format.decode(
      files.map((file) => ({
        name: basename(file),
        bytes: withFiles('--to', file, 'a file to replace', () => new Uint8Array(readFileSync(file))),
      })),
    );
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const there = files.filter((file) => existsSync(file)).join(' and ');
    const wanted = `expected a new file, or a tree in ${format.extensions[0]} to replace`;
    throw inputError('file', '--to', `got ${there}, which is there and holds something else, ${wanted}`);
  }
}

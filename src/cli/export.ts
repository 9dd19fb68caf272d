import { existsSync, readFileSync, realpathSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import type { Command } from 'commander';
import { InputError, inputError, MESH_FORMATS, splitTreePath, TREE_FORMATS, type TreeFormat } from '../index.ts';
import { MESH_FOLDER, placeForFile, RUN_FOLDER, readTree, withFiles, writeFiles } from '../node/index.ts';
import { addCommonOptions, addExample, addRequired, type Context, runWork, TREE_ENDINGS } from './command.ts';
import { EXIT } from './exit-codes.ts';
import { exportMesh, meshExportOf } from './export-mesh.ts';
import type { CommonOptions, Talk } from './io.ts';
import { COLOUR_BY_HELP, MESH_FORMATS_HELP } from './mesh-formats.ts';

interface ExportArguments extends CommonOptions {
  readonly to: string;
  readonly colourBy?: string;
  readonly around?: string;
  readonly stretch?: string;
}

/** Endings that a tree is written in; others that a mesh is. */
const TREE_ONLY: readonly string[] = TREE_FORMATS.flatMap((format) => format.extensions);
const ENDINGS = [...TREE_ONLY, ...MESH_FORMATS.map(({ ending }) => ending).filter((one) => !TREE_ONLY.includes(one))];

export function addExport(program: Command, context: Context): void {
  const command = program
    .command('export')
    .summary('write a tree or a mesh in another format')
    .description(
      'Writes a tree or the lumen mesh of a mesh folder in the format that the file’s extension names. Where a tree is\n' +
        'given and no tree is written so (.glb, .stl, …), it is meshed as `mesh` does, and checked. An .stl of more than five\n' +
        'million triangles is made while it is written, in binary, and is not checked: of a tree of any size.',
    )
    .argument('<tree>', `run folder, tree file (${TREE_ENDINGS}) or mesh folder`);
  addRequired(command, '--to <file>', `file to write: ${ENDINGS.join(', ')}`);
  command
    .option('--colour-by <what>', COLOUR_BY_HELP)
    .option('--around <count>', 'of a tree that is meshed: segments round a vessel, as in `mesh`')
    .option('--stretch <factor>', 'of a tree that is meshed: axial edges over those round a vessel, as in `mesh`');
  addCommonOptions(command, null);
  command.addHelpText('after', `\nFormats of trees:\n${describeFormats()}\nFormats of meshes:\n${MESH_FORMATS_HELP}`);
  addExample(command, 'export runs/gel --to gel.csv', 'export meshes/gel --to gel.glb --colour-by pressure');
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
  const { to } = options;
  const mesh = meshExportOf(path, to, options, TREE_FORMATS.some(hasEnding(to)));
  if (mesh !== null) {
    refuseFolderFile(to);
    return exportMesh(path, to, mesh, talk);
  }
  if (!TREE_FORMATS.some(hasEnding(to)))
    throw inputError('extension', '--to', `got ${to}, expected a name that ends in ${ENDINGS.join(', ')}`);
  const { format, files, stem } = splitTreePath(to, '--to');
  for (const file of files) placeForFile(file, '--to');
  const tree = readTree(path);
  for (const note of tree.notes) talk.note(note);
  const sources = tree.files.map(({ name }) => realpathSync(join(tree.folder, name)));
  const taken = files.find((file) => existsSync(file) && sources.includes(realpathSync(file)));
  if (taken !== undefined) {
    throw inputError('file', '--to', `got ${taken}, the file that is read, expected another`);
  }
  for (const file of files) refuseFolderFile(file);
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

/** Whether a path ends as files of a tree format do, in any case. */
function hasEnding(path: string): (format: TreeFormat) => boolean {
  const lower = path.toLowerCase();
  return ({ extensions, parts }) => [...extensions, ...parts].some((ending) => lower.endsWith(ending));
}

/** The own files of a run or a mesh folder say one thing together; none of them is replaced alone. */
function refuseFolderFile(file: string): void {
  const place = existsSync(file) ? realpathSync(file) : resolve(file);
  for (const { title, marks, others } of [RUN_FOLDER, MESH_FOLDER]) {
    if (![...marks, ...others].includes(basename(place))) continue;
    if (!marks.every((mark) => existsSync(join(dirname(place), mark)))) continue;
    throw inputError('file', '--to', `got ${file}, which belongs to a ${title}, expected another name or folder`);
  }
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

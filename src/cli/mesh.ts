import { join } from 'node:path';
import type { Command } from 'commander';
import {
  type CheckResult,
  checkLumen,
  checkTable,
  inputError,
  LUMEN_DEFAULTS,
  MESH_UNITS,
  type MeshOptions,
  type MeshResult,
  meshTree,
  toSi,
} from '../index.ts';
import { MESH_FOLDER, placeForFolder, readTree, specOfTree, writeFolder } from '../node/index.ts';
import { addCommonOptions, addExample, addRequired, type Context, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';
import { positiveNumber, wholeNumber, withOptionNames } from './option-values.ts';

/** What the library's options are called on the command line. */
const OPTION_NAMES = { around: '--around', keepAbove: '--keep-above', keepOrder: '--keep-order' };

interface MeshArguments extends CommonOptions {
  readonly out: string;
  readonly around?: string;
  readonly keepAbove?: string;
  readonly keepOrder?: string;
  readonly unit?: string;
}

export function addMesh(program: Command, context: Context): void {
  const command = program
    .command('mesh')
    .summary('mesh the lumen of a tree for flow solvers')
    .description(
      'Makes a closed, labelled surface of the lumen, with flat caps and the network’s boundary values, and writes a\n' +
        'mesh folder: lumen.stl (one named solid a patch), lumen_one_solid.stl, lumen.vtp, lumen.msh, boundary.csv,\n' +
        'network.csv, mesh.json. The files are checked before they are written; where the check finds something they are\n' +
        'written all the same, the findings are listed, and the exit code is 1.',
    )
    .argument('<tree>', 'run folder or tree file');
  addRequired(command, '--out <folder>', 'folder to write; an earlier mesh there is replaced');
  command
    .option('--around <count>', `segments round a vessel, 8 to 256; ${LUMEN_DEFAULTS.around} where not given`)
    .option('--keep-above <radius_um>', 'leave out vessels thinner than this radius in µm, with a cap in their place')
    .option('--keep-order <order>', 'leave out vessels below this Strahler order; terminals have order 1')
    .option('--unit <unit>', `unit of the surface files: ${MESH_UNITS.join(', ')}; tables are in metres always`, 'm');
  addCommonOptions(command, 'print the summary as one JSON document');
  addExample(command, 'mesh runs/gel --out meshes/gel --keep-above 60', 'mesh runs/gel --out meshes/gel-mm --unit mm');
  command.action((tree: string, options: MeshArguments) =>
    runWork(context, options, (talk) => mesh(tree, options, talk)),
  );
}

function mesh(path: string, options: MeshArguments, talk: Talk): number {
  const wanted = meshOptions(options);
  placeForFolder(options.out, MESH_FOLDER, '--out');
  const tree = readTree(path);
  for (const note of tree.notes) talk.note(note);
  talk.onProgress({ stage: 'mesh', done: 0, total: 1 });
  const made = withOptionNames({ ...OPTION_NAMES, tree: path }, () => meshTree(tree.record, specOfTree(tree), wanted));
  talk.onProgress({ stage: 'proof', done: 0, total: 1 });
  const check = checkFiles(made);
  const files = made.files.map(({ name, bytes }) => ({ name, content: bytes }));
  writeFolder(options.out, MESH_FOLDER, files, talk.writing('--out'));
  talk.settle();
  const held = check.held && made.mesh.problems.length === 0;
  talk.result(
    () => describeMesh(made, check, options.out),
    () => JSON.stringify(summariseMesh(made, check, options.out, held), null, 2),
  );
  return held ? EXIT.held : EXIT.broken;
}

function meshOptions(options: MeshArguments): MeshOptions {
  const unit = MESH_UNITS.find((one) => one === options.unit);
  if (unit === undefined) {
    throw inputError(
      'bad-value',
      '--unit',
      `got ${JSON.stringify(options.unit)}, expected one of ${MESH_UNITS.join(', ')}`,
    );
  }
  return {
    unit,
    around: options.around === undefined ? undefined : wholeNumber(options.around, '--around', 8, 256),
    keepAbove:
      options.keepAbove === undefined ? undefined : toSi(positiveNumber(options.keepAbove, '--keep-above'), 'um'),
    keepOrder: options.keepOrder === undefined ? undefined : wholeNumber(options.keepOrder, '--keep-order', 1, 1000),
  };
}

/** The independent check, on the bytes that will be written. */
function checkFiles(made: MeshResult): CheckResult {
  const bytesOf = (name: string): Uint8Array | null => made.files.find((file) => file.name === name)?.bytes ?? null;
  return checkLumen({
    surface: bytesOf('lumen.stl')!,
    boundary: bytesOf('boundary.csv')!,
    network: bytesOf('network.csv'),
    notes: bytesOf('mesh.json'),
    vtp: bytesOf('lumen.vtp'),
    msh: bytesOf('lumen.msh'),
    oneSolid: bytesOf('lumen_one_solid.stl'),
  });
}

function describeMesh(made: MeshResult, check: CheckResult, out: string): string {
  const { mesh: lumen, files, vessels, removed } = made;
  const broken = check.promises.filter((promise) => promise.held === false).length;
  const held = check.promises.filter((promise) => promise.held === true).length;
  const lines = [
    `lumen of ${vessels} vessels${removed === 0 ? '' : `, ${removed} finer ones cut off`}`,
    `  triangles: ${lumen.triangle.length / 3}, patches: wall and ${lumen.patches.length - 1} caps`,
    `  promises: ${held} held, ${broken} broken`,
    ...lumen.problems.map(({ vessel, why }) => `    NOT MET: at the end of vessel ${vessel}: ${why}`),
    `  written: ${join(out, '/')}: ${files.map(({ name }) => name).join(', ')}`,
  ];
  return `${lines.join('\n')}\n${broken === 0 ? '' : `\n${checkTable(check)}`}`;
}

function summariseMesh(made: MeshResult, check: CheckResult, out: string, held: boolean): unknown {
  const { mesh: lumen, files, vessels, removed } = made;
  return {
    out,
    files: files.map(({ name }) => name),
    held,
    vessels,
    removed,
    triangles: lumen.triangle.length / 3,
    patches: lumen.patches.map(({ name }) => name),
    problems: lumen.problems.map(({ vessel, why }) => ({ vessel, why })),
    promises: check.promises,
    findings: check.findings,
  };
}

import { join } from 'node:path';
import type { Command } from 'commander';
import {
  AROUND_RANGE,
  addNegative,
  type CheckResult,
  checkLumen,
  checkTable,
  INLET_PROFILES,
  inputError,
  LENGTH_CHOICES,
  LUMEN_DEFAULTS,
  MESH_UNITS,
  type MeshOptions,
  type MeshResult,
  meshTree,
  type NegativeResult,
  SOLVER_FILES,
  toSi,
  VOLUME_DEFAULTS,
  type VolumeNotes,
} from '../index.ts';
import {
  MESH_FOLDER,
  placeForFolder,
  readTree,
  specOfTree,
  surfacesOfTree,
  type TreeFiles,
  writeFolder,
} from '../node/index.ts';
import { addCommonOptions, addExample, addRequired, type Context, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';
import { COLOUR_BY_HELP, colourByOf, MESH_FORMATS_HELP, meshFormatsOf } from './mesh-formats.ts';
import { addMeshFormats } from './more-formats.ts';
import { numberFrom, oneOf, positiveNumber, wholeNumber, withOptionNames } from './option-values.ts';

/** What the library's options are called on the command line. */
const OPTION_NAMES = {
  around: '--around',
  axialStretch: '--stretch',
  colourBy: '--colour-by',
  extend: '--extend',
  keepAbove: '--keep-above',
  keepOrder: '--keep-order',
  layerGrowth: '--layer-growth',
  layers: '--layers',
  solverFiles: '--solver-files',
};

interface MeshArguments extends CommonOptions {
  readonly out: string;
  readonly around?: string;
  readonly keepAbove?: string;
  readonly keepOrder?: string;
  readonly unit?: string;
  readonly lengths?: string;
  readonly formats?: string;
  readonly colourBy?: string;
  readonly stretch?: string;
  readonly extend?: string;
  readonly profile?: string;
  readonly solverFiles?: string;
  readonly volume?: boolean;
  readonly layers?: string;
  readonly layerGrowth?: string;
  readonly negative?: boolean;
  readonly leastWall?: string;
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
    .option('--around <count>', `segments round a vessel, 6 to 256; ${LUMEN_DEFAULTS.around} where not given`)
    .option('--keep-above <radius_um>', 'leave out vessels thinner than this radius in µm, with a cap in their place')
    .option('--keep-order <order>', 'leave out vessels below this Strahler order; terminals have order 1')
    .option('--unit <unit>', `unit of the surface files: ${MESH_UNITS.join(', ')}; tables are in metres always`, 'm')
    .option(
      '--lengths <which>',
      'network of the tables: axis, or effective (less what of vessels lies in others; nearer to flow in the mesh)',
      'axis',
    )
    .option('--formats <list>', 'further files to write, such as ply,glb: any of those below')
    .option('--colour-by <what>', COLOUR_BY_HELP)
    .option('--stretch <factor>', 'axial edges over those round a vessel, 1 to 3.5: fewer, longer triangles', '1')
    .option('--extend <diameters>', 'draw vessels out straight at all caps, by diameters of their own, 0 to 100')
    .option('--profile <shape>', `write inlet_profile.csv: velocities at inlets, ${INLET_PROFILES.join(' or ')}`)
    .option(
      '--solver-files <list>',
      `write input that runs as it is: ${SOLVER_FILES.join(',')} (steady laminar flow in the folder openfoam)`,
    )
    .option(
      '--volume',
      'fill the surface with cells: lumen_volume.vtu, with velocity and pressure, and lumen_volume.msh',
    )
    .option(
      '--layers <count>',
      `with --volume: layers of cells along the wall, 0 to 20; ${VOLUME_DEFAULTS.layers} where not given`,
    )
    .option(
      '--layer-growth <factor>',
      `with --volume: thickness of a layer over the one outside it, 1 to 3; ${VOLUME_DEFAULTS.layerGrowth} where not given`,
    )
    .option(
      '--negative',
      'write negative.stl and .3mf for printing: the tissue’s block less the lumen, open at the roots',
    )
    .option('--least-wall <thickness_um>', 'with --negative: tell where walls are thinner than this, in µm');
  addCommonOptions(command, 'print the summary as one JSON document');
  command.addHelpText('after', `\nFormats:\n${MESH_FORMATS_HELP}`);
  addExample(
    command,
    'mesh runs/gel --out meshes/gel --keep-above 60',
    'mesh runs/gel --out meshes/gel-mm --unit mm --formats 3mf,glb --colour-by pressure',
  );
  command.action((tree: string, options: MeshArguments) =>
    runWork(context, options, (talk) => mesh(tree, options, talk)),
  );
}

async function mesh(path: string, options: MeshArguments, talk: Talk): Promise<number> {
  const wanted = meshOptions(options);
  const formats = options.formats === undefined ? [] : meshFormatsOf(options.formats, '--formats');
  const colourBy = colourByOf(options.colourBy, formats, '--formats with glb');
  const leastWall = leastWallOf(options);
  placeForFolder(options.out, MESH_FOLDER, '--out');
  const tree = readTree(path);
  for (const note of tree.notes) talk.note(note);
  talk.onProgress({ stage: 'mesh', done: 0, total: 1 });
  const lumen = withOptionNames({ ...OPTION_NAMES, tree: path }, () => {
    const plain = meshTree(tree.record, specOfTree(tree), wanted);
    return { ...plain, files: addMeshFormats(plain.files, formats, colourBy) };
  });
  const negative = options.negative === true ? await negativeOf(tree, lumen, wanted, leastWall) : null;
  const made = { ...lumen, files: negative?.files ?? lumen.files };
  talk.onProgress({ stage: 'proof', done: 0, total: 1 });
  const check = checkMesh(made);
  const files = made.files.map(({ name, bytes }) => ({ name, content: bytes }));
  writeFolder(options.out, MESH_FOLDER, files, talk.writing('--out'));
  talk.settle();
  const notes = negative?.notes ?? null;
  const held = check.held && made.mesh.problems.length === 0 && (notes?.problems.length ?? 0) === 0;
  talk.result(
    () => describeMesh(made, notes, check, options.out),
    () => JSON.stringify({ ...summariseMesh(made, check, options.out, held), negative: notes }, null, 2),
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
    around:
      options.around === undefined
        ? undefined
        : wholeNumber(options.around, '--around', AROUND_RANGE.min, AROUND_RANGE.max),
    keepAbove:
      options.keepAbove === undefined ? undefined : toSi(positiveNumber(options.keepAbove, '--keep-above'), 'um'),
    keepOrder: options.keepOrder === undefined ? undefined : wholeNumber(options.keepOrder, '--keep-order', 1, 1000),
    lengths: oneOf(options.lengths ?? 'axis', '--lengths', LENGTH_CHOICES),
    axialStretch: positiveNumber(options.stretch ?? '1', '--stretch'),
    ...volumeOptions(options),
    extend: options.extend === undefined ? undefined : numberFrom(options.extend, '--extend', 0, 100),
    profile: options.profile === undefined ? undefined : oneOf(options.profile, '--profile', INLET_PROFILES),
    solverFiles:
      options.solverFiles === undefined
        ? undefined
        : options.solverFiles.split(',').map((word) => oneOf(word, '--solver-files', SOLVER_FILES)),
  };
}

function volumeOptions(options: MeshArguments): Pick<MeshOptions, 'volume' | 'layers' | 'layerGrowth'> {
  const { volume = false, layers, layerGrowth } = options;
  for (const [name, value] of [
    ['--layers', layers],
    ['--layer-growth', layerGrowth],
  ] as const) {
    if (value !== undefined && !volume)
      throw inputError('bad-value', name, 'got it without --volume, expected both or neither');
  }
  return {
    volume,
    layers: layers === undefined ? undefined : wholeNumber(layers, '--layers', 0, 20),
    layerGrowth: layerGrowth === undefined ? undefined : numberFrom(layerGrowth, '--layer-growth', 1, 3),
  };
}

function leastWallOf(options: MeshArguments): number {
  if (options.leastWall === undefined) return 0;
  if (options.negative !== true)
    throw inputError('bad-value', '--least-wall', 'got it without --negative, expected both or neither');
  return toSi(positiveNumber(options.leastWall, '--least-wall'), 'um');
}

function negativeOf(
  tree: TreeFiles,
  made: MeshResult,
  options: MeshOptions,
  leastWall: number,
): Promise<NegativeResult> {
  const spec = specOfTree(tree);
  const surfaces = spec === null ? new Map() : surfacesOfTree(tree, spec).surfaces;
  return addNegative(made, tree.record, spec, surfaces, options, leastWall);
}

function describeNegative(notes: NegativeResult['notes']): string[] {
  const micro = (length: number | null) => (length === null ? 'none' : `${Number((length * 1e6).toPrecision(4))} µm`);
  const cubic = (volume: number) => `${Number((volume * 1e9).toPrecision(4))} mm³`;
  return [
    `  negative: ${notes.triangles} triangles, ${cubic(notes.channels_m3)} of channels in ${cubic(notes.block_m3)}, ` +
      `least wall between channels ${micro(notes.least_wall_between_channels_m)}, ` +
      `to the surface ${micro(notes.least_wall_to_surface_m)}`,
    ...notes.problems.map((why) => `    NOT MET: ${why}`),
  ];
}

/** The independent check, on the bytes that will be written. */
export function checkMesh(made: MeshResult): CheckResult {
  const bytesOf = (name: string): Uint8Array | null => made.files.find((file) => file.name === name)?.bytes ?? null;
  return checkLumen({
    surface: bytesOf('lumen.stl')!,
    boundary: bytesOf('boundary.csv')!,
    network: bytesOf('network.csv'),
    notes: bytesOf('mesh.json'),
    vtp: bytesOf('lumen.vtp'),
    msh: bytesOf('lumen.msh'),
    oneSolid: bytesOf('lumen_one_solid.stl'),
    negative: bytesOf('negative.stl'),
    volume: bytesOf('lumen_volume.vtu'),
  });
}

function describeMesh(
  made: MeshResult,
  negative: NegativeResult['notes'] | null,
  check: CheckResult,
  out: string,
): string {
  const { mesh: lumen, files, vessels, removed } = made;
  const broken = check.promises.filter((promise) => promise.held === false).length;
  const held = check.promises.filter((promise) => promise.held === true).length;
  const lines = [
    `lumen of ${vessels} vessels${removed === 0 ? '' : `, ${removed} finer ones cut off`}`,
    `  triangles: ${lumen.triangle.length / 3}, patches: wall and ${lumen.patches.length - 1} caps`,
    ...(made.volume === null ? [] : [describeVolume(made.volume)]),
    `  promises: ${held} held, ${broken} broken`,
    ...lumen.problems.map(({ vessel, why }) => `    NOT MET: at the end of vessel ${vessel}: ${why}`),
    ...(negative === null ? [] : describeNegative(negative)),
    `  written: ${join(out, '/')}: ${files.map(({ name }) => name).join(', ')}`,
  ];
  return `${lines.join('\n')}\n${broken === 0 ? '' : `\n${checkTable(check)}`}`;
}

function describeVolume({ cells, prisms, pyramids, tetrahedra, least_scaled_jacobian }: VolumeNotes): string {
  const least = Number(least_scaled_jacobian.toPrecision(3));
  return `  volume: ${cells} cells (${prisms} prisms, ${pyramids} pyramids, ${tetrahedra} tetrahedra), least scaled Jacobian ${least}`;
}

function summariseMesh(made: MeshResult, check: CheckResult, out: string, held: boolean): object {
  const { mesh: lumen, files, vessels, removed } = made;
  return {
    out,
    files: files.map(({ name }) => name),
    held,
    vessels,
    removed,
    triangles: lumen.triangle.length / 3,
    patches: lumen.patches.map(({ name }) => name),
    volume: made.volume,
    problems: lumen.problems.map(({ vessel, why }) => ({ vessel, why })),
    promises: check.promises,
    findings: check.findings,
  };
}

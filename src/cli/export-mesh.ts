import { closeSync, existsSync, openSync, readFileSync, readSync } from 'node:fs';
import { join } from 'node:path';
import { AROUND_RANGE, inputError, MESH_FORMATS, meshTree, type SurfaceStream, streamSurface } from '../index.ts';
import {
  isMeshFolder,
  placeForFile,
  readTree,
  specOfTree,
  type TreeFiles,
  withFiles,
  writeFiles,
} from '../node/index.ts';
import { EXIT } from './exit-codes.ts';
import type { Talk } from './io.ts';
import { checkMesh } from './mesh.ts';
import {
  type ColourBy,
  colourByOf,
  decodeMesh,
  type MeshFormat,
  type MeshSurface,
  meshFormatOf,
} from './mesh-formats.ts';
import { numberFrom, wholeNumber, withOptionNames } from './option-values.ts';

/** Bytes of a file by which a format knows its own. */
const HEAD = 4096;

/** Triangles above which a surface is not held in memory. */
const LARGE = 5_000_000;
/** Triangles above which no other format than STL is written of a tree: they are not made piece by piece. */
const MOST = 20_000_000;

export interface MeshExport {
  readonly format: MeshFormat;
  readonly colourBy: ColourBy | undefined;
  readonly around: number | undefined;
  readonly axialStretch: number | undefined;
}

/** Options as they were given. */
export interface MeshExportWords {
  readonly colourBy?: string;
  readonly around?: string;
  readonly stretch?: string;
}

/**
 * What is asked for where a mesh is: of a mesh folder any mesh format, of a tree those that no tree is written in.
 *
 * @param isTree whether the path to write has the ending of a tree format
 * @returns null where a tree is to be written
 */
export function meshExportOf(path: string, to: string, words: MeshExportWords, isTree: boolean): MeshExport | null {
  const folder = isMeshFolder(path);
  const colours = words.colourBy;
  if (folder || isTree) refuseShape(words, folder ? 'a mesh folder, which is meshed already' : 'a tree format');
  if (isTree && !folder) {
    colourByOf(colours, [], 'a mesh as .glb');
    return null;
  }
  const format = meshFormatOf(to);
  if (format === null && folder) {
    const endings = MESH_FORMATS.map(({ ending }) => ending).join(', ');
    throw inputError(
      'extension',
      '--to',
      `got ${to}, expected a name that ends in ${endings}, which a mesh is written in`,
    );
  }
  if (format === null) return null;
  return {
    format,
    colourBy: colourByOf(colours, [format], 'a mesh as .glb'),
    around:
      words.around === undefined
        ? undefined
        : wholeNumber(words.around, '--around', AROUND_RANGE.min, AROUND_RANGE.max),
    axialStretch: words.stretch === undefined ? undefined : numberFrom(words.stretch, '--stretch', 1, 3.5),
  };
}

/** Options that shape a mesh, where none is made. */
function refuseShape({ around, stretch }: MeshExportWords, got: string): void {
  if (around !== undefined) throw inputError('bad-value', '--around', `got it with ${got}, expected a tree to mesh`);
  if (stretch !== undefined) throw inputError('bad-value', '--stretch', `got it with ${got}, expected a tree to mesh`);
}

/** Writes the mesh of a mesh folder, or of a tree meshed as `mesh` does. */
export function exportMesh(path: string, to: string, wanted: MeshExport, talk: Talk): number {
  const { format, colourBy } = wanted;
  placeForFile(to, '--to');
  if (existsSync(to)) refuseForeign(format, to);
  let surface: MeshSurface;
  let held = true;
  if (isMeshFolder(path)) surface = readSurface(path);
  else {
    const tree = readTree(path);
    for (const note of tree.notes) talk.note(note);
    const stream = streamSurface(tree.record, wanted);
    if (format.id === 'stl' && stream.foreseen > LARGE) return exportStream(stream, to, talk);
    if (stream.foreseen > MOST) {
      throw inputError(
        'too-large',
        '--to',
        `got a tree whose surface has about ${stream.foreseen} triangles, expected at most ${MOST} in ${format.ending}; .stl is written of any size, and --around and --stretch make fewer`,
      );
    }
    ({ surface, held } = meshSurfaceOf(tree, path, wanted, talk));
  }
  const content = withOptionNames({ colourBy: '--colour-by' }, () => format.encode(surface, { colourBy }));
  writeFiles([{ path: to, content }], talk.writing('--to'));
  talk.say(`written: ${to}, in ${format.unitOf(surface.unit)}`);
  if (format.drops.length > 0) talk.note(`${format.ending} holds no ${format.drops.join(', no ')}`);
  return held ? EXIT.held : EXIT.broken;
}

/** Writes a surface that is too large to be held. */
function exportStream({ stl, figures, problems }: SurfaceStream, to: string, talk: Talk): number {
  talk.onProgress({ stage: 'mesh', done: 0, total: 1 });
  writeFiles([{ path: to, content: stl }], talk.writing('--to'));
  talk.settle();
  const angle = (figures.smallestAngle * 180) / Math.PI;
  talk.say(
    `written: ${to}, in m: ${figures.triangles} triangles, volume ${Number((figures.volume * 1e9).toPrecision(6))} mm³, ` +
      `smallest angle ${angle.toFixed(1)}°; made while it was written, not checked`,
  );
  const missed = problems();
  for (const { vessel, why } of missed) talk.note(`NOT MET: at the end of vessel ${vessel}: ${why}`);
  return missed.length === 0 ? EXIT.held : EXIT.broken;
}

function readSurface(folder: string): MeshSurface {
  const path = join(folder, 'lumen.vtp');
  const bytes = withFiles(folder, path, 'a file of a mesh folder', () => new Uint8Array(readFileSync(path)));
  return decodeMesh(bytes, path);
}

function meshSurfaceOf(
  tree: TreeFiles,
  path: string,
  { around, axialStretch }: MeshExport,
  talk: Talk,
): { readonly surface: MeshSurface; readonly held: boolean } {
  talk.onProgress({ stage: 'mesh', done: 0, total: 1 });
  const options = { around, axialStretch };
  const made = withOptionNames({ tree: path }, () => meshTree(tree.record, specOfTree(tree), options));
  talk.onProgress({ stage: 'proof', done: 0, total: 1 });
  const broken = checkMesh(made).promises.filter((promise) => promise.held === false);
  talk.settle();
  for (const { vessel, why } of made.mesh.problems) talk.note(`NOT MET: at the end of vessel ${vessel}: ${why}`);
  if (broken.length > 0)
    talk.note(`NOT MET: ${broken.map(({ id }) => id).join(', ')}; \`mesh\` and \`check\` tell more`);
  const vtp = made.files.find(({ name }) => name === 'lumen.vtp')!;
  return { surface: decodeMesh(vtp.bytes, vtp.name), held: broken.length === 0 && made.mesh.problems.length === 0 };
}

/** A file that lies there is replaced only where it is a mesh of this program in the format that is written. */
function refuseForeign(format: MeshFormat, to: string): void {
  const bytes = new Uint8Array(HEAD);
  const size = withFiles('--to', to, 'a file to replace', () => {
    const file = openSync(to, 'r');
    try {
      return readSync(file, bytes, 0, HEAD, 0);
    } finally {
      closeSync(file);
    }
  });
  if (format.owns(String.fromCharCode(...bytes.subarray(0, size)))) return;
  const wanted = `expected a new file, or a mesh of this program in ${format.ending} to replace`;
  throw inputError('file', '--to', `got ${to}, which is there and holds something else, ${wanted}`);
}

import { closeSync, existsSync, openSync, readFileSync, readSync } from 'node:fs';
import { join } from 'node:path';
import { inputError, MESH_FORMATS, meshTree } from '../index.ts';
import { isMeshFolder, placeForFile, readTree, specOfTree, withFiles, writeFiles } from '../node/index.ts';
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
import { withOptionNames } from './option-values.ts';

/** Bytes of a file by which a format knows its own. */
const HEAD = 4096;

export interface MeshExport {
  readonly format: MeshFormat;
  readonly colourBy: ColourBy | undefined;
}

/**
 * What is asked for where a mesh is: of a mesh folder any mesh format, of a tree those that no tree is written in.
 *
 * @param isTree whether the path to write has the ending of a tree format
 * @returns null where a tree is to be written
 */
export function meshExportOf(
  path: string,
  to: string,
  colours: string | undefined,
  isTree: boolean,
): MeshExport | null {
  const folder = isMeshFolder(path);
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
  return { format, colourBy: colourByOf(colours, [format], 'a mesh as .glb') };
}

/** Writes the mesh of a mesh folder, or of a tree meshed as `mesh` does where no option is given. */
export function exportMesh(path: string, to: string, { format, colourBy }: MeshExport, talk: Talk): number {
  placeForFile(to, '--to');
  if (existsSync(to)) refuseForeign(format, to);
  const { surface, held } = isMeshFolder(path) ? { surface: readSurface(path), held: true } : meshSurfaceOf(path, talk);
  const content = withOptionNames({ colourBy: '--colour-by' }, () => format.encode(surface, { colourBy }));
  writeFiles([{ path: to, content }], talk.writing('--to'));
  talk.say(`written: ${to}, in ${format.unitOf(surface.unit)}`);
  if (format.drops.length > 0) talk.note(`${format.ending} holds no ${format.drops.join(', no ')}`);
  return held ? EXIT.held : EXIT.broken;
}

function readSurface(folder: string): MeshSurface {
  const path = join(folder, 'lumen.vtp');
  const bytes = withFiles(folder, path, 'a file of a mesh folder', () => new Uint8Array(readFileSync(path)));
  return decodeMesh(bytes, path);
}

function meshSurfaceOf(path: string, talk: Talk): { readonly surface: MeshSurface; readonly held: boolean } {
  const tree = readTree(path);
  for (const note of tree.notes) talk.note(note);
  talk.onProgress({ stage: 'mesh', done: 0, total: 1 });
  const made = withOptionNames({ tree: path }, () => meshTree(tree.record, specOfTree(tree)));
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

import { existsSync, readdirSync, readFileSync, realpathSync, statSync } from 'node:fs';
import { join, relative, resolve } from 'node:path';
import {
  CASE_FILES,
  CASE_FOLDER,
  InputError,
  inputError,
  lumenFile,
  MESH_FORMATS,
  parseSpec,
  shapeFiles,
} from '../index.ts';
import { withFiles } from './system-faults.ts';

/** A kind of folder this program writes. */
export interface FolderKind {
  readonly title: string;
  /** Every such folder holds these. */
  readonly marks: readonly string[];
  /** And may hold these. */
  readonly others: readonly string[];
  /** And may hold these folders, as long as nothing but these files is in them (a name that ends in `/`: a folder of any). */
  readonly folders?: Readonly<Record<string, readonly string[]>>;
}

export const RUN_FOLDER: FolderKind = {
  title: 'run',
  marks: ['tree.vtp', 'report.json'],
  others: ['spec.json', 'report.html'],
};

export const MESH_FOLDER: FolderKind = {
  title: 'mesh folder',
  marks: ['lumen.stl', 'mesh.json'],
  others: [
    ...['lumen_one_solid.stl', 'lumen.vtp', 'lumen.msh', 'boundary.csv', 'network.csv'],
    ...['inlet_profile.csv', 'fill.geo', 'negative.stl', 'negative.3mf'],
    ...['lumen_volume.vtu', 'lumen_volume.msh'],
    ...MESH_FORMATS.map(lumenFile),
  ],
  // A case that was run holds results, which are not to be lost.
  folders: { [CASE_FOLDER]: CASE_FILES },
};

/**
 * Refuses a place that a folder may not be written to. May be asked before long work begins, and is asked again before
 * anything is replaced.
 *
 * @param out   as the caller gave it
 * @param where what it came from, e.g. `--out`
 * @returns     the place itself, links resolved
 * @throws      InputError where something else lies there than nothing, an empty folder, or a folder of the same kind
 *              that holds nothing but files this program writes
 */
export function placeForFolder(out: string, kind: FolderKind, where: string): string {
  if (out === '') throw inputError('file', where, `got an empty path, expected a folder for the ${kind.title}`);
  const wanted = `a place for a ${kind.title}`;
  return withFiles(where, out, wanted, () => {
    if (!existsSync(out)) return resolve(out);
    const place = realpathSync(out);
    if (!statSync(place).isDirectory())
      throw inputError('file', where, `got ${out}, which is a file, expected a folder`);
    const home = relative(place, realpathSync(process.cwd()));
    if (!home.startsWith('..')) {
      throw inputError('file', where, `got ${out}, which holds the folder you work in, expected a folder of its own`);
    }
    const names = readdirSync(place);
    const foreign = names.length === 0 ? [] : foreignNames(place, names, kind);
    if (foreign.length === 0) return place;
    const listed = foreign.slice(0, 3).join(', ') + (foreign.length > 3 ? ` and ${foreign.length - 3} more` : '');
    const message = `got ${out}, which is no ${kind.title} of this program (it holds ${listed}), expected a new or empty folder, or a ${kind.title} to replace`;
    throw inputError('file', where, message);
  });
}

/** What keeps a folder from being replaced. */
function foreignNames(place: string, names: readonly string[], kind: FolderKind): readonly string[] {
  if (!kind.marks.every((mark) => names.includes(mark))) return names;
  const own = new Set([...kind.marks, ...kind.others, ...copiedSurfaces(place)]);
  return names.flatMap((name) => (own.has(name) ? [] : foreignIn(place, name, kind.folders?.[name])));
}

/** What is not ours in a folder; the name itself where it is none of ours. */
function foreignIn(place: string, name: string, files: readonly string[] | undefined): readonly string[] {
  const path = join(place, name);
  if (files === undefined || !statSync(path).isDirectory()) return [name];
  return readdirSync(path, { recursive: true, encoding: 'utf8' })
    .map((inner) => inner.replaceAll('\\', '/'))
    .filter((inner) => !statSync(join(path, inner)).isDirectory())
    .filter((inner) => !files.some((file) => (file.endsWith('/') ? inner.startsWith(file) : inner === file)))
    .map((inner) => `${name}/${inner}`);
}

/** Surfaces that a run's spec names. */
function copiedSurfaces(place: string): readonly string[] {
  const path = join(place, 'spec.json');
  if (!existsSync(path)) return [];
  try {
    return shapeFiles(parseSpec(readFileSync(path, 'utf8'), path));
  } catch (error) {
    if (error instanceof InputError) return [];
    throw error;
  }
}

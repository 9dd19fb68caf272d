import { existsSync, readFileSync, statSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import {
  type ClaimedCost,
  InputError,
  inputError,
  parseSpec,
  type Spec,
  shapeFiles,
  splitTreePath,
  type TreeFormat,
  type TreeRecord,
} from '../index.ts';
import { withSource } from './large-files.ts';
import { readSurfaces, type SpecFiles } from './read-spec.ts';
import { readBytes, withFiles } from './system-faults.ts';

/** A tree as it lies on the disk. */
export interface TreeFiles {
  /** As the caller gave it. */
  readonly path: string;
  /** Whether the path is a run folder. */
  readonly run: boolean;
  /** Folder of the tree file. */
  readonly folder: string;
  /** Names of the files read; their bytes are read again where they were not kept. */
  readonly files: readonly { readonly name: string; readonly bytes: Uint8Array }[];
  readonly format: TreeFormat;
  readonly record: TreeRecord;
  /** What the file lacked and what was supplied, a sentence each. */
  readonly notes: readonly string[];
}

/**
 * Reads the tree of a run folder, or of a tree file of any known format.
 *
 * @throws InputError naming every place that is broken
 */
export function readTree(path: string): TreeFiles {
  const wanted = 'a run folder or a tree file';
  // A tree of two files has none under the name that stands for both.
  const run = existsSync(path) && statSync(path).isDirectory();
  const file = run ? join(path, 'tree.vtp') : path;
  if (run && !existsSync(file)) {
    const mesh = existsSync(join(path, 'mesh.json'));
    const held = mesh ? 'a mesh folder, which holds no tree' : 'a folder without a tree.vtp';
    throw inputError('file', path, `got ${held}, expected ${wanted}`);
  }
  const { format, files } = existsSync(file) ? splitTreePath(file, path) : splitMissing(file, path, wanted);
  const folder = dirname(resolve(file));
  const only = files.length === 1 ? files[0]! : null;
  const { decodeSource } = format;
  if (only !== null && decodeSource !== undefined && existsSync(only) && statSync(only).isFile()) {
    const name = basename(only);
    const { record, notes } = withFiles(path, only, wanted, () => withSource(only, name, decodeSource));
    const again = {
      name,
      get bytes() {
        return readBytes(path, only, wanted);
      },
    };
    return { path, run, folder, files: [again], format, record, notes };
  }
  const parts = files.map((part) => ({
    name: basename(part),
    bytes: readBytes(path, part, wanted),
  }));
  const { record, notes } = format.decode(parts);
  return { path, run, folder, files: parts, format, record, notes };
}

/** Takes apart a path where nothing lies; only a format of several files may have them beside it. */
function splitMissing(file: string, path: string, wanted: string): ReturnType<typeof splitTreePath> {
  try {
    return splitTreePath(file, path);
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    throw inputError('file', path, `got ${path}, which does not exist, expected ${wanted}`);
  }
}

/**
 * The spec that a tree carries.
 *
 * @returns null where the file holds none
 * @throws  InputError where it holds one that is broken
 */
export function specOfTree(tree: TreeFiles): Spec | null {
  const { provenance } = tree.record;
  return provenance === null ? null : parseSpec(provenance, `${tree.path}: provenance`);
}

/**
 * The surfaces of a tree's spec, from beside the tree.
 *
 * @returns also the files that are not there; where any is missing, none is read
 * @throws  InputError for surfaces that are there and cannot be read
 */
export function surfacesOfTree(tree: TreeFiles, spec: Spec): SpecFiles & { readonly missing: readonly string[] } {
  const missing = shapeFiles(spec).filter((file) => !existsSync(resolve(tree.folder, file)));
  if (missing.length === 0) return { ...readSurfaces(spec, tree.folder), missing };
  return { spec, surfaces: new Map(), bytes: new Map(), missing };
}

/**
 * Cost figures that a run's report.json claims.
 *
 * @returns null for a tree file, or a run without a report
 * @throws  InputError where the report is there and does not hold them
 */
export function claimedCost(tree: TreeFiles): ClaimedCost | null {
  const path = join(tree.folder, 'report.json');
  if (!tree.run || !existsSync(path)) return null;
  const text = withFiles(tree.path, path, 'the report of the run', () => readFileSync(path, 'utf8'));
  let cost: unknown;
  try {
    cost = (JSON.parse(text) as { readonly cost?: unknown } | null)?.cost;
  } catch {
    throw inputError('bad-json', path, 'got no JSON, expected the report of the run');
  }
  const claimed = cost as ClaimedCost | undefined;
  for (const key of ['pumping_W', 'maintenance_W', 'total_W'] as const) {
    if (typeof claimed?.[key] === 'number') continue;
    throw inputError('missing', `${path}: cost.${key}`, 'got nothing, expected a number');
  }
  return claimed!;
}

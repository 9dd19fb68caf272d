import { readFileSync } from 'node:fs';
import { basename, dirname, resolve } from 'node:path';
import { decodeSurface, type Fault, InputError, parseSpec, type Spec, type TriangleSurface } from '../index.ts';
import { readBytes, withFiles } from './system-faults.ts';

type Shape = Spec['tissue'];

/** A spec and the surface files it names. */
export interface SpecFiles {
  readonly spec: Spec;
  /** By the shape's `file`, in the files' own units. */
  readonly surfaces: ReadonlyMap<string, TriangleSurface>;
  /** The same files as bytes. */
  readonly bytes: ReadonlyMap<string, Uint8Array>;
}

/** A surface shape of a spec and where it stands. */
interface NamedFile {
  /** Spec path, e.g. `tissue.parts[1].file`. */
  readonly where: string;
  readonly file: string;
}

/**
 * Reads a spec and every surface it names; their paths are relative to the spec's folder.
 *
 * @param path of a JSON file
 * @throws InputError with every fault: of the spec by spec path, of a surface by its file
 */
export function readSpec(path: string): SpecFiles {
  const text = withFiles(path, path, 'a spec file', () => readFileSync(path, 'utf8'));
  const spec = parseSpec(text, path);
  return readSurfaces(spec, dirname(resolve(path)));
}

/**
 * Reads the surfaces of a spec.
 *
 * @param folder that relative paths start from
 * @throws InputError with the faults of all of them
 */
export function readSurfaces(spec: Spec, folder: string): SpecFiles {
  const surfaces = new Map<string, TriangleSurface>();
  const bytes = new Map<string, Uint8Array>();
  const faults: Fault[] = [];
  for (const { where, file } of surfaceShapes(spec)) {
    if (bytes.has(file)) continue;
    try {
      const content = readBytes(where, file, 'a surface file beside the spec', resolve(folder, file));
      bytes.set(file, content);
      surfaces.set(file, decodeSurface(content, file));
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      faults.push(...error.faults);
    }
  }
  if (faults.length > 0) throw new InputError(faults);
  return { spec, surfaces, bytes };
}

/**
 * The same with every surface named by its base name, as it is called once copied beside the results.
 *
 * @throws InputError where two different files have one base name
 */
export function useBaseNames(read: SpecFiles): SpecFiles {
  const owner = new Map<string, string>();
  const faults: Fault[] = [];
  for (const { where, file } of surfaceShapes(read.spec)) {
    // Names that differ in case only are one file on some disks.
    const key = basename(file).toLowerCase();
    const first = owner.get(key) ?? file;
    owner.set(key, first);
    if (first === file || equalBytes(read.bytes.get(first)!, read.bytes.get(file)!)) continue;
    const message = `got ${file}, another file than ${first} but of the same name, expected names that differ: both are copied into one folder`;
    faults.push({ code: 'duplicate', where, message });
  }
  if (faults.length > 0) throw new InputError(faults);
  const nameOf = (file: string): string => basename(owner.get(basename(file).toLowerCase())!);
  const rename = <T>(map: ReadonlyMap<string, T>): Map<string, T> =>
    new Map([...map].map(([file, value]) => [nameOf(file), value]));
  const { spec } = read;
  return {
    spec: {
      ...spec,
      tissue: renameFiles(spec.tissue, nameOf),
      forbidden: spec.forbidden.map((part) => renameFiles(part, nameOf)),
      ...(spec.demand === undefined
        ? {}
        : { demand: spec.demand.map((part) => ({ ...part, shape: renameFiles(part.shape, nameOf) })) }),
    },
    surfaces: rename(read.surfaces),
    bytes: rename(read.bytes),
  };
}

function surfaceShapes(spec: Spec): NamedFile[] {
  const found: NamedFile[] = [];
  const visit = (shape: Shape, where: string): void => {
    if (shape.shape === 'surface') found.push({ where: `${where}.file`, file: shape.file });
    if (shape.shape === 'union' || shape.shape === 'intersection') {
      shape.parts.forEach((part, i) => {
        visit(part, `${where}.parts[${i}]`);
      });
    }
    if (shape.shape === 'difference') {
      visit(shape.of, `${where}.of`);
      shape.minus.forEach((part, i) => {
        visit(part, `${where}.minus[${i}]`);
      });
    }
  };
  visit(spec.tissue, 'tissue');
  spec.forbidden.forEach((part, i) => {
    visit(part, `tissue.forbidden[${i}]`);
  });
  spec.demand?.forEach((part, i) => {
    visit(part.shape, `tissue.demand[${i}]`);
  });
  return found;
}

function renameFiles(shape: Shape, nameOf: (file: string) => string): Shape {
  if (shape.shape === 'surface') return { ...shape, file: nameOf(shape.file) };
  if (shape.shape === 'union' || shape.shape === 'intersection') {
    return { ...shape, parts: shape.parts.map((part) => renameFiles(part, nameOf)) };
  }
  if (shape.shape === 'difference') {
    const minus = shape.minus.map((part) => renameFiles(part, nameOf));
    return { ...shape, of: renameFiles(shape.of, nameOf), minus };
  }
  return shape;
}

function equalBytes(a: Uint8Array, b: Uint8Array): boolean {
  return Buffer.compare(a, b) === 0;
}

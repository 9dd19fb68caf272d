import { readdirSync, readFileSync } from 'node:fs';
import type { TriangleSurface } from '../../src/core/surface.ts';
import { decodeSurface } from '../../src/formats/surface/surface-formats.ts';
import { parseSpec } from '../../src/spec/parse.ts';
import { shapeFiles } from '../../src/spec/shape-files.ts';
import type { Spec } from '../../src/spec/types.ts';

const FOLDER = new URL('../../presets/', import.meta.url);

export const PRESETS = readdirSync(FOLDER)
  .filter((file) => file.endsWith('.json') && file !== 'spec.schema.json')
  .map((file) => file.slice(0, -'.json'.length))
  .sort();

export interface LoadedPreset {
  readonly spec: Spec;
  readonly surfaces: ReadonlyMap<string, TriangleSurface>;
}

/** A preset with the surfaces it names; with another count of terminals where one is given and it goes by count. */
export function loadPreset(name: string, count?: number): LoadedPreset {
  const spec = parseSpec(readFileSync(new URL(`${name}.json`, FOLDER), 'utf8'), name);
  const surfaces = new Map(
    shapeFiles(spec).map((file) => [file, decodeSurface(readFileSync(new URL(file, FOLDER)), file)] as const),
  );
  if (count === undefined) return { spec, surfaces };
  const trees = spec.trees.map((tree) =>
    tree.terminals.by === 'count' ? { ...tree, terminals: { ...tree.terminals, count } } : tree,
  );
  return { spec: { ...spec, trees }, surfaces };
}

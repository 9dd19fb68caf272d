import { existsSync, readdirSync, readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { distance } from 'fastest-levenshtein';
import { inputError, parseSpec } from '../index.ts';

const FOLDER = fileURLToPath(new URL('../../presets/', import.meta.url));

/** A spec that comes with the program. */
export interface Preset {
  /** File name without its ending; what `grow` takes. */
  readonly id: string;
  readonly path: string;
  readonly name: string;
  readonly purpose: string;
}

/** Names of the presets, sorted. */
export function presetIds(): string[] {
  return readdirSync(FOLDER)
    .filter((file) => file.endsWith('.json') && !file.endsWith('.schema.json'))
    .map((file) => file.slice(0, -'.json'.length))
    .sort();
}

/** All presets with what they are for. */
export function listPresets(): Preset[] {
  return presetIds().map((id) => {
    const path = presetPath(id);
    const spec = parseSpec(readFileSync(path, 'utf8'), path);
    return { id, path, name: spec.name, purpose: spec.purpose ?? '' };
  });
}

export function presetPath(id: string): string {
  return `${FOLDER}${id}.json`;
}

/** @throws InputError naming the nearest preset */
export function assertPreset(id: string, where: string): void {
  const ids = presetIds();
  if (ids.includes(id)) return;
  const nearest = [...ids].sort((a, b) => distance(a, id) - distance(b, id))[0]!;
  throw inputError(
    'unknown-preset',
    where,
    `got ${JSON.stringify(id)}, which is neither a file nor a preset; the nearest preset is ${nearest} (of ${ids.join(', ')})`,
  );
}

/**
 * Path of a spec given as a file or as the name of a preset; a file wins.
 *
 * @throws InputError where it is neither
 */
export function specPath(given: string): string {
  if (existsSync(given) || /[/\\]|\.json$/i.test(given)) return given;
  assertPreset(given, 'spec');
  return presetPath(given);
}

import { inputError, lumenFile, MESH_FORMATS } from '../index.ts';

export type MeshFormat = (typeof MESH_FORMATS)[number];
export type MeshSurface = Parameters<MeshFormat['encode']>[0];
export type ColourBy = MeshFormat['colours'][number];

/** What each mesh format is, the unit it writes and what it cannot hold. */
export const MESH_FORMATS_HELP = MESH_FORMATS.map((format) => {
  const { id, title, units, drops } = format;
  const lost = drops.length === 0 ? 'nothing' : drops.join(', ');
  return `  ${id.padEnd(5)} ${lumenFile(format)}: ${title}\n        units: ${units}\n        drops: ${lost}\n`;
}).join('');

const COLOURED = MESH_FORMATS.filter(({ colours }) => colours.length > 0);
const COLOURS = COLOURED[0]!.colours;
export const COLOUR_BY_HELP = `what the colours of a ${COLOURED[0]!.ending} tell: ${COLOURS.join(', ')}; ${COLOURS[0]} where not given`;

/** The format whose ending a path has, in any case; null where it has none of them. */
export function meshFormatOf(path: string): MeshFormat | null {
  const lower = path.toLowerCase();
  return MESH_FORMATS.find(({ ending }) => lower.endsWith(ending)) ?? null;
}

/**
 * The formats of a list such as `ply,obj`, in the order of the table, each once.
 *
 * @throws InputError naming every word that is none
 */
export function meshFormatsOf(list: string, option: string): readonly MeshFormat[] {
  const words = list.split(',').map((word) => word.trim().toLowerCase());
  const known = MESH_FORMATS.map(({ id }) => id);
  const wrong = words.filter((word) => !known.includes(word));
  if (wrong.length > 0) {
    const got = wrong.map((word) => JSON.stringify(word)).join(', ');
    throw inputError('bad-value', option, `got ${got}, expected a list of ${known.join(', ')}`);
  }
  return MESH_FORMATS.filter(({ id }) => words.includes(id));
}

/**
 * What `--colour-by` asks for.
 *
 * @param formats those that are written; one of them must have colours
 * @param wanted  what would have them, for the fault
 * @throws  InputError
 */
export function colourByOf(
  text: string | undefined,
  formats: readonly MeshFormat[],
  wanted: string,
): ColourBy | undefined {
  if (text === undefined) return undefined;
  const colourBy = COLOURS.find((one) => one === text);
  if (colourBy === undefined) {
    const message = `got ${JSON.stringify(text)}, expected one of ${COLOURS.join(', ')}`;
    throw inputError('bad-value', '--colour-by', message);
  }
  if (formats.some(({ colours }) => colours.includes(colourBy))) return colourBy;
  throw inputError('bad-value', '--colour-by', `got ${text}, but nothing written has colours, expected ${wanted}`);
}

/**
 * Reads the surface of a mesh folder from its `lumen.vtp`.
 *
 * @param name file, for faults
 * @throws InputError naming every place that is broken
 */
export function decodeMesh(bytes: Uint8Array, name: string): MeshSurface {
  return MESH_FORMATS.find(({ id }) => id === 'vtp')!.decode!(bytes, name);
}

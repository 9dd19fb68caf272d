import { inputError } from '../../core/errors.ts';
import type { TriangleSurface } from '../../core/surface.ts';
import { decodeObj } from './obj.ts';
import { decodePly } from './ply.ts';
import { decodeStl } from './stl.ts';

/** Files a tissue surface may be read from; none of them states its unit. */
export const SURFACE_FORMATS = [
  { id: 'stl', extensions: ['.stl'], decode: decodeStl },
  { id: 'ply', extensions: ['.ply'], decode: decodePly },
  { id: 'obj', extensions: ['.obj'], decode: decodeObj },
] as const;

/**
 * Reads a triangle surface by the extension of its file name.
 *
 * @returns coordinates in the file's own unit; nothing is assumed of the surface (see `checkSurface`)
 * @throws  InputError for an unknown extension or a file that does not hold what its format promises
 */
export function decodeSurface(bytes: Uint8Array, file: string): TriangleSurface {
  const name = file.toLowerCase();
  for (const format of SURFACE_FORMATS)
    if (format.extensions.some((extension) => name.endsWith(extension))) return format.decode(bytes, file);
  const known = SURFACE_FORMATS.flatMap((format) => format.extensions).join(', ');
  throw inputError('unknown-format', file, `got ${file}, expected a file of ${known}`);
}

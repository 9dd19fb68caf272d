import { readFileSync, statSync } from 'node:fs';
import { type InputError, inputError } from '../index.ts';
import { readAll } from './large-files.ts';

/** What the system said, in words that tell the user what to do. */
const WORDS: Readonly<Record<string, string>> = {
  ENOENT: 'which does not exist',
  EACCES: 'which you have no permission for',
  EPERM: 'which the system does not allow',
  EISDIR: 'which is a folder',
  ENOTDIR: 'where a part of the path is no folder',
  ENAMETOOLONG: 'a name that is too long',
  ELOOP: 'links that lead in a circle',
  EROFS: 'which can only be read',
  ENOSPC: 'but the disk is full',
  EDQUOT: 'but your share of the disk is full',
  EBUSY: 'which is in use (a mount point cannot be replaced: give a folder inside it)',
  EXDEV: 'which lies on another disk than its folder',
  EMFILE: 'but too many files are open',
  ERR_FS_FILE_TOO_LARGE: 'which is larger than 2 GiB',
  ERR_STRING_TOO_LONG: 'which is larger than a text may be',
  ERR_INVALID_ARG_VALUE: 'which is no path',
};

/** Whether an error is the file system's answer, and not a fault of this program. */
export function isSystemError(error: unknown): error is NodeJS.ErrnoException {
  return error instanceof Error && typeof (error as NodeJS.ErrnoException).code === 'string' && !('faults' in error);
}

/**
 * Runs something that touches files; what the system refuses becomes the caller's fault.
 *
 * @param where  what the path came from: a spec path, an option, or the path itself
 * @param path   as the caller knows it
 * @param wanted what was expected, e.g. `a tree file`
 * @throws InputError; errors that are not the system's pass through
 */
export function withFiles<T>(where: string, path: string, wanted: string, step: () => T): T {
  try {
    return step();
  } catch (error) {
    throw isSystemError(error) ? systemFault(error, where, path, wanted) : error;
  }
}

function systemFault(error: NodeJS.ErrnoException, where: string, path: string, wanted: string): InputError {
  const code = error.code ?? '';
  const words = WORDS[code] ?? `but the system says ${code}`;
  return inputError('file', where, `got ${path}, ${words}, expected ${wanted}`);
}

/**
 * Bytes of a file, as a plain array: a Buffer's `slice` is a view, and decoders may take it for a copy.
 *
 * @throws InputError where the system refuses
 */
export function readBytes(where: string, path: string, wanted: string, at = path): Uint8Array {
  return withFiles(where, path, wanted, () => {
    if (statSync(at).isFile()) return readAll(at);
    const buffer = readFileSync(at);
    return new Uint8Array(buffer.buffer, buffer.byteOffset, buffer.length);
  });
}

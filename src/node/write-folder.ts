import { existsSync, mkdirSync, renameSync, rmSync } from 'node:fs';
import { dirname, join, resolve } from 'node:path';
import { type Content, writeContent } from './large-files.ts';
import { type FolderKind, placeForFolder } from './out-folder.ts';
import { withFiles } from './system-faults.ts';
import { clearStale, temporaryBeside, type WriteOptions, withParents } from './temporary.ts';

/** A file of a folder. */
export interface OutFile {
  /** With `/` between folders. */
  readonly name: string;
  readonly content: Content;
}

/**
 * Writes a folder as a whole: into a temporary one beside it, which is then renamed into place. What lies there is
 * replaced only as `placeForFolder` allows. A process that is killed leaves the old folder or the new one, and at worst a
 * hidden temporary folder that the next write to the same place removes.
 *
 * @throws InputError where the place is taken or the system refuses
 */
export function writeFolder(out: string, kind: FolderKind, files: readonly OutFile[], options: WriteOptions): void {
  const { where } = options;
  withFiles(where, out, `a place for a ${kind.title}`, () => {
    clearStale(resolve(out));
    const place = placeForFolder(out, kind, where);
    withParents(place, () => {
      const temporary = temporaryBeside(place, 'partial');
      options.temporary?.(temporary);
      try {
        mkdirSync(temporary);
        for (const { name, content } of files) {
          const path = join(temporary, name);
          if (name.includes('/')) mkdirSync(dirname(path), { recursive: true });
          writeContent(path, content);
        }
        putInPlace(temporary, place, options);
      } finally {
        rmSync(temporary, { recursive: true, force: true });
      }
    });
  });
}

/** Two renames, because none replaces a folder that holds something. */
function putInPlace(temporary: string, place: string, options: WriteOptions): void {
  const old = temporaryBeside(place, 'old');
  const commit = options.commit ?? ((step: () => void) => step());
  commit(() => {
    if (existsSync(place)) renameSync(place, old);
    try {
      renameSync(temporary, place);
    } catch (error) {
      if (existsSync(old)) renameSync(old, place);
      throw error;
    }
  });
  options.temporary?.(old);
  rmSync(old, { recursive: true, force: true });
}

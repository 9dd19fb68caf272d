import { existsSync, renameSync, rmSync, statSync } from 'node:fs';
import { resolve } from 'node:path';
import { inputError } from '../index.ts';
import { type Content, writeContent } from './large-files.ts';
import { withFiles } from './system-faults.ts';
import { clearStale, temporaryBeside, type WriteOptions, withParents } from './temporary.ts';

/** A file and where it goes. */
export interface PlacedFile {
  readonly path: string;
  readonly content: Content;
}

/**
 * Writes files as wholes, all of them or none: each into a temporary file beside its place, then all are renamed. Files
 * that lie there are replaced.
 *
 * @throws InputError where the system refuses, or a folder lies there
 */
export function writeFiles(files: readonly PlacedFile[], options: WriteOptions): void {
  const made: string[] = [];
  const writeFrom = (k: number): void => {
    const file = files[k];
    if (file === undefined) {
      const commit = options.commit ?? ((step: () => void) => step());
      commit(() => {
        files.forEach(({ path }, i) => {
          renameSync(made[i]!, resolve(path));
        });
      });
      return;
    }
    withFiles(options.where, file.path, 'a place for a file', () => {
      placeForFile(file.path, options.where);
      const place = resolve(file.path);
      clearStale(place);
      withParents(place, () => {
        const temporary = temporaryBeside(place, 'partial');
        options.temporary?.(temporary);
        made.push(temporary);
        try {
          writeContent(temporary, file.content);
          writeFrom(k + 1);
        } finally {
          rmSync(temporary, { force: true });
        }
      });
    });
  };
  writeFrom(0);
}

/**
 * Refuses a place that a file may not be written to; may be asked before long work begins.
 *
 * @throws InputError where the path is empty or a folder lies there
 */
export function placeForFile(path: string, where: string): void {
  if (path === '') throw inputError('file', where, 'got an empty path, expected a file');
  if (existsSync(path) && statSync(path).isDirectory()) {
    throw inputError('file', where, `got ${path}, which is a folder, expected a file`);
  }
}

import type { TreeRecord } from '../tree/forest.ts';
import { splitTreePath } from './tree-formats.ts';

/**
 * Reads a tree that fits in one file, by the ending of its name.
 *
 * @throws InputError for an unknown ending, a format of several files, or anything broken
 */
export function decodeTree(name: string, bytes: Uint8Array): TreeRecord {
  const { format } = splitTreePath(name, name);
  return format.decode([{ name, bytes }]).record;
}

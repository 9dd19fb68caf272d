import { inputError } from '../core/errors.ts';
import type { TreeFormat } from './format.ts';
import { CSV } from './tree/csv.ts';
import { JSON_TREE } from './tree/json.ts';
import { SWC } from './tree/swc.ts';
import { VTP } from './tree/vtp.ts';
import { VTU } from './tree/vtu.ts';

/** Every format a tree can be written to and read from; help, README and conformance tests read this table. */
export const TREE_FORMATS = [VTP, CSV, JSON_TREE, SWC, VTU] as const satisfies readonly TreeFormat[];

/** A path taken apart: what it is written in, and the files that stand there. */
export interface TreePath {
  readonly format: TreeFormat;
  /** The path without what the format adds. */
  readonly stem: string;
  /** Path of each file, in the order of the format's parts. */
  readonly files: readonly string[];
}

/**
 * Finds the format and files of a path such as `out/tree.csv`, which stands for `out/tree.nodes.csv` and
 * `out/tree.vessels.csv`; either of those names stands for both too.
 *
 * @param path  any, `/` or `\` between folders; the extension in any case
 * @param where what the path came from, for the fault
 * @throws InputError listing the known extensions
 */
export function splitTreePath(path: string, where: string): TreePath {
  const lower = path.toLowerCase();
  for (const format of TREE_FORMATS) {
    const endings = [...format.parts, ...format.extensions].sort((a, b) => b.length - a.length);
    const ending = endings.find((end) => lower.endsWith(end));
    if (ending === undefined) continue;
    const stem = path.slice(0, -ending.length);
    // A single file keeps the spelling it was given, so that TREE.VTP is found where case matters.
    const files = format.parts.length === 1 ? [path] : format.parts.map((part) => stem + part);
    return { format, stem, files };
  }
  const known = TREE_FORMATS.flatMap((format) => format.extensions).join(', ');
  throw inputError('extension', where, `got ${path}, expected a name that ends in ${known}`);
}

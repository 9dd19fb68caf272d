import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import type { Command } from 'commander';
import { type CheckResult, checkLumen, checkRun, checkTable } from '../index.ts';
import {
  claimedCost,
  isMeshFolder,
  readMesh,
  readTree,
  specOfTree,
  surfacesOfTree,
  type TreeFiles,
} from '../node/index.ts';
import { addCommonOptions, addExample, type Context, runWork, TREE_ENDINGS } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';

export function addCheck(program: Command, context: Context): void {
  const command = program
    .command('check')
    .summary('recompute every promise from the files')
    .description(
      'Recomputes every promise of a run, a tree file or a mesh folder from the files alone, and lists what breaks one.\n' +
        'A run’s report is held to its cost figures too. What a file does not tell (a spec, a flow solution) is said to\n' +
        'be unchecked; so is what was changed after growth by `flow`.',
    )
    .argument('<result>', `run folder, tree file (${TREE_ENDINGS}) or mesh folder`);
  addCommonOptions(command, 'print promises and findings as one JSON document');
  addExample(command, 'check runs/gel', 'check meshes/gel --json');
  command.action((path: string, options: CommonOptions) => runWork(context, options, (talk) => check(path, talk)));
}

function check(path: string, talk: Talk): number {
  const mesh = isMeshFolder(path);
  const result = mesh ? checkLumen(readMesh(path)) : checkTreeFiles(readTree(path), talk);
  talk.result(
    () => checkTable(result),
    () => JSON.stringify({ path, kind: mesh ? 'mesh' : 'tree', ...result }, null, 2),
  );
  return result.held ? EXIT.held : EXIT.broken;
}

function checkTreeFiles(tree: TreeFiles, talk: Talk): CheckResult {
  for (const note of tree.notes) talk.note(note);
  const spec = specOfTree(tree);
  const surfaces = spec === null ? new Map() : surfacesOfTree(tree, spec).surfaces;
  if (tree.run && readText(join(tree.folder, 'spec.json')) !== tree.record.provenance) {
    talk.note(`${join(tree.path, 'spec.json')} is not the spec that tree.vtp carries; the tree’s own was used`);
  }
  return checkRun(tree.record, spec, surfaces, { claimed: claimedCost(tree) });
}

/** Text of a file, or null where there is none. */
function readText(path: string): string | null {
  try {
    return readFileSync(path, 'utf8');
  } catch {
    return null;
  }
}

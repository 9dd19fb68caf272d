import { readFileSync } from 'node:fs';
import type { Command } from 'commander';
import { compareJson, compareJUnit, compareTable, compareTrees, DEFAULT_TOLERANCE, parseTolerance } from '../index.ts';
import { placeForFile, readTree, type TreeFiles, withFiles, writeFiles } from '../node/index.ts';
import { addCommonOptions, addExample, type Context, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';

interface CompareArguments extends CommonOptions {
  readonly tolerance?: string;
  readonly junit?: string;
}

export function addCompare(program: Command, context: Context): void {
  const command = program
    .command('compare')
    .summary('tell whether two trees are the same, and where they first differ')
    .description(
      'Compares two trees vessel by vessel: the same bytes, the same tree within tolerances, or different, with the\n' +
        'first difference named. What only one of them has is a difference, unless the other’s format cannot hold it. Exit\n' +
        'code 0 for the first two, 1 for the last. Folders of many runs are not compared by this version.',
    )
    .argument('<A>', 'run folder or tree file')
    .argument('<B>', 'run folder or tree file')
    .option('--tolerance <file>', `JSON object of tolerances: ${Object.keys(DEFAULT_TOLERANCE).join(', ')}`)
    .option('--junit <file>', 'write the verdict as JUnit XML too');
  addCommonOptions(command, 'print the comparison as one JSON document');
  addExample(command, 'compare runs/before runs/after', 'compare old.vtp runs/new --junit compare.xml');
  command.action((a: string, b: string, options: CompareArguments) =>
    runWork(context, options, (talk) => compare(a, b, options, talk)),
  );
}

function compare(pathA: string, pathB: string, options: CompareArguments, talk: Talk): number {
  const { tolerance: file, junit } = options;
  if (junit !== undefined) placeForFile(junit, '--junit');
  const tolerance =
    file === undefined
      ? DEFAULT_TOLERANCE
      : parseTolerance(
          withFiles('--tolerance', file, 'a file of tolerances', () => readFileSync(file, 'utf8')),
          file,
        );
  const [a, b] = [readTree(pathA), readTree(pathB)];
  for (const note of new Set([...a.notes, ...b.notes])) talk.note(note);
  const result = compareTrees(a.record, b.record, tolerance, {
    sameBytes: sameBytes(a, b),
    files: [a, b].map(({ format }) => ({ name: format.extensions[0]!, drops: format.drops })),
  });
  if (junit !== undefined) {
    const content = compareJUnit(result, { name: `${pathA} ${pathB}` });
    writeFiles([{ path: junit, content }], talk.writing('--junit'));
  }
  talk.result(
    () => compareTable(result),
    () => compareJson(result),
  );
  return result.verdict === 'different' ? EXIT.broken : EXIT.held;
}

/** Whether two trees were read from the same bytes; not known of files of two formats. */
function sameBytes(a: TreeFiles, b: TreeFiles): boolean | undefined {
  if (a.format !== b.format) return undefined;
  return a.files.every((file, k) => Buffer.compare(file.bytes, b.files[k]!.bytes) === 0);
}

import { realpathSync } from 'node:fs';
import { basename, join, resolve } from 'node:path';
import type { Command } from 'commander';
import {
  buildTissue,
  CAUTION,
  checkRun,
  describeChanges,
  inputError,
  reportRun,
  solveAgain,
  vesselName,
} from '../index.ts';
import { Meter, placeForFolder, RUN_FOLDER, readTree, specOfTree, surfacesOfTree, writeRun } from '../node/index.ts';
import { addCommonOptions, addExample, addRequired, type Context, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';
import { narrowOf, quantityOf, withOptionNames } from './option-values.ts';

interface FlowArguments extends CommonOptions {
  readonly out: string;
  readonly viscosity?: string;
  readonly narrow?: readonly string[];
}

export function addFlow(program: Command, context: Context): void {
  const command = program
    .command('flow')
    .summary('solve the flow in a grown tree again')
    .description(
      'Solves pressure and flow in a grown tree again, under another viscosity or with vessels narrowed, and writes a\n' +
        'run folder. With another viscosity alone, flows stay and pressures follow. Where a vessel is narrowed, inlets and\n' +
        'terminals keep their pressures and flows follow. The viscosity is constant in this version.\n' +
        'Exit code 1 if the solution fails its check, or if flow would run backwards somewhere, which no tree file holds\n' +
        '(nothing is written then). Promises of the spec that the change necessarily breaks are said to be unchecked, here and\n' +
        'by `check`. spec.json stays the spec as grown, with the change told under solved_again.',
    )
    .argument('<tree>', 'run folder or tree file that carries its spec');
  addRequired(command, '--out <run>', 'folder to write; an earlier run there is replaced');
  command
    .option('--viscosity <value>', 'constant viscosity with its unit, such as 3.5mPa_s or 0.0035Pa_s')
    .option(
      '--narrow <tree:vessel:fraction>',
      'take this fraction off the radius of a vessel, such as supply:12:0.5; may be given again',
      (value: string, before: readonly string[] | undefined) => [...(before ?? []), value],
    );
  addCommonOptions(command, 'print the summary as one JSON document');
  addExample(command, 'flow runs/gel --narrow supply:12:0.5 --out runs/gel-narrowed');
  command.action((tree: string, options: FlowArguments) =>
    runWork(context, options, (talk) => flow(tree, options, talk)),
  );
}

function flow(path: string, options: FlowArguments, talk: Talk): number {
  const viscosity =
    options.viscosity === undefined ? undefined : quantityOf(options.viscosity, '--viscosity', 'viscosity');
  const place = placeForFolder(options.out, RUN_FOLDER, '--out');
  const tree = readTree(path);
  if (tree.run && place === realpathSync(path)) {
    throw inputError('file', '--out', `got ${options.out}, the run that is read, expected another folder`);
  }
  for (const note of tree.notes) talk.note(note);
  const spec = specOfTree(tree);
  if (spec === null || spec.trees.length !== tree.record.names.length) {
    const got =
      spec === null ? 'a tree without a spec' : `a spec of ${spec.trees.length} trees for ${tree.record.names.length}`;
    throw inputError(
      'no-spec',
      path,
      `got ${got}, expected a tree that carries its spec, which tells pressures and blood`,
    );
  }
  const meter = new Meter();
  meter.see({ stage: 'flow' });
  const narrow = (options.narrow ?? []).map((text) => narrowOf(text, tree.record));
  const {
    record,
    spec: used,
    solvedAgain,
    reversed,
  } = withOptionNames({ viscosity: '--viscosity' }, () => solveAgain(tree.record, spec, { viscosity, narrow }));
  const nameOf = (row: number): string => vesselName(tree.record.forest, tree.record.names, row);
  if (record === null) {
    const found = `flow would run backwards in ${reversed.length} vessels, first ${nameOf(reversed[0]!)}; nothing was written`;
    talk.result(
      () => `${found}\n`,
      () => JSON.stringify({ out: null, held: false, reversed: reversed.map(nameOf) }, null, 2),
    );
    return EXIT.broken;
  }
  const home = surfacesOfTree(tree, spec);
  meter.see({ stage: 'proof' });
  const check = checkRun(record, spec, home.surfaces);
  const changes = describeChanges(solvedAgain);
  const notes = [
    ...changes,
    ...(changes.length === 0
      ? []
      : ['the tree was solved again after it was grown: spec.json grows it as it was before the change']),
    ...home.missing.map(
      (file) => `${file} is not beside the tree, so there is no copy of it and the tissue is not known`,
    ),
  ];
  const tissue = home.missing.length > 0 ? null : buildTissue(used.tissue, home.surfaces, used.forbidden);
  const report = reportRun({ spec: used, record, check, shortfalls: notes, tissue }, meter.read());
  const files = writeRun(options.out, record, report, home.bytes, talk.writing('--out'));
  const failed = check.promises.filter((promise) => promise.held === false);
  const lapsed = check.promises.filter((promise) => promise.note.startsWith('not checked: changed'));
  const { held } = check;
  talk.result(
    () =>
      [
        `${report.name ?? basename(resolve(path))}: solved again`,
        ...notes.map((note) => `  ${note}`),
        ...report.trees.map(
          ({ name, root_flow_m3_s: q, root_pressure_Pa: p }) =>
            `  tree ${name}: ${q.toPrecision(6)} m³/s through the root, at ${p?.toPrecision(6)} Pa`,
        ),
        ...failed.map(({ title, where }) => `  BROKEN: ${title}, worst at ${where ?? '?'}`),
        ...lapsed.map(({ title }) => `  not checked, as the change breaks it: ${title}`),
        `  written: ${join(options.out, '/')}: ${files.join(', ')}`,
        `  look at both: vesselwright view ${path} ${options.out}`,
        '',
        `${CAUTION}\n`,
      ].join('\n'),
    () =>
      JSON.stringify(
        {
          out: options.out,
          files,
          held,
          changes,
          trees: report.trees,
          cost: report.cost,
          promises: check.promises,
          caution: CAUTION,
        },
        null,
        2,
      ),
  );
  return held ? EXIT.held : EXIT.broken;
}

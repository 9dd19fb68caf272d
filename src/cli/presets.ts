import { readFileSync } from 'node:fs';
import type { Command } from 'commander';
import { addCommonOptions, addExample, type Context, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';
import { assertPreset, listPresets, presetPath } from './preset-files.ts';
import { layOutColumns } from './printed.ts';

export function addPresets(program: Command, context: Context): void {
  const command = program
    .command('presets')
    .summary('list the specs that come with the program, or print one')
    .description('Lists the specs that come with the program, or prints one: a start for a spec of your own.')
    .argument('[name]', 'preset to print');
  addCommonOptions(command, 'print the list as one JSON document (a preset is one already)');
  addExample(command, 'presets', 'presets gel-block > my-spec.json');
  command.action((name: string | undefined, options: CommonOptions) =>
    runWork(context, options, (talk) => presets(name, talk)),
  );
}

function presets(name: string | undefined, talk: Talk): number {
  if (name !== undefined) {
    assertPreset(name, 'name');
    const text = readFileSync(presetPath(name), 'utf8');
    talk.result(
      () => text,
      () => text,
    );
    return EXIT.held;
  }
  const list = listPresets();
  talk.result(
    () => layOutColumns(list.map(({ id, purpose }) => [id, purpose])),
    () => JSON.stringify(list, null, 2),
  );
  return EXIT.held;
}

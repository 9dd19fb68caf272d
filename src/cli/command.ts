import type { Command } from 'commander';
import { TREE_FORMATS } from '../index.ts';
import { EXIT } from './exit-codes.ts';
import { type CommonOptions, type Io, Talk } from './io.ts';

const endings = (formats: readonly { readonly extensions: readonly string[] }[]): string =>
  formats.flatMap((format) => format.extensions).join(' ');
/** Endings of the files a tree may be read from, for help; and of those that hold it in one file. */
export const TREE_ENDINGS = endings(TREE_FORMATS);
export const ONE_FILE_ENDINGS = endings(TREE_FORMATS.filter((format) => format.parts.length === 1));

/** What a command is run with, and where its exit code goes. */
export interface Context {
  readonly io: Io;
  code: number;
}

/** Adds `--quiet` and, where a result is printed, `--json`. */
export function addCommonOptions(command: Command, json: string | null): Command {
  command.option('--quiet', 'say nothing but faults');
  return json === null ? command : command.option('--json', json);
}

/**
 * Adds an option that must be given. Asked for only once all that was given is known to be right: of a misspelt option the
 * spelling is the fault to tell, not that the right one is missing.
 */
export function addRequired(command: Command, flags: string, description: string): Command {
  const option = command.createOption(flags, description);
  return command.addOption(option).hook('preAction', () => {
    if (command.getOptionValue(option.attributeName()) !== undefined) return;
    command.error(`error: required option '${flags}' not specified`, { exitCode: EXIT.input });
  });
}

/** Adds the example that every help ends with. */
export function addExample(command: Command, ...lines: readonly string[]): Command {
  return command.addHelpText('after', `\nExample:\n${lines.map((line) => `  $ vesselwright ${line}\n`).join('')}`);
}

/** Runs a command's work; what it returns becomes the exit code. */
export async function runWork(
  context: Context,
  options: CommonOptions,
  work: (talk: Talk) => number | Promise<number>,
): Promise<void> {
  try {
    context.code = await work(new Talk(context.io, options));
  } finally {
    context.io.progress(null);
  }
}

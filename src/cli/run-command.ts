import { Command, CommanderError } from 'commander';
import { VERSION } from '../index.ts';
import { addCheck } from './check.ts';
import type { Context } from './command.ts';
import { addCompare } from './compare.ts';
import { EXIT, EXIT_HELP } from './exit-codes.ts';
import { addExport } from './export.ts';
import { tellFailure } from './failure.ts';
import { addFlow } from './flow.ts';
import { addGrow } from './grow.ts';
import type { Io } from './io.ts';
import { addMesh } from './mesh.ts';
import { addPresets } from './presets.ts';
import { addView } from './view.ts';

const COMMANDS = [addGrow, addFlow, addMesh, addExport, addCheck, addCompare, addView, addPresets];

/**
 * Runs one command line.
 *
 * @param argv what follows the program's name
 * @returns    the exit code; whatever went wrong has been told
 */
export async function main(argv: readonly string[], io: Io): Promise<number> {
  const context: Context = { io, code: EXIT.held };
  try {
    const program = buildProgram(context);
    await program.parseAsync(knownCommand(program, argv) ? argv : argv.slice(0, 1), { from: 'user' });
    return context.code;
  } catch (error) {
    if (error instanceof CommanderError) return error.exitCode === 0 ? EXIT.held : EXIT.input;
    return tellFailure(error, io);
  }
}

/** False where the first word is no command: it is then parsed alone, so that `--help` after it does not hide that. */
function knownCommand(program: Command, argv: readonly string[]): boolean {
  const [first] = argv;
  if (first === undefined || first.startsWith('-') || first === 'help') return true;
  return program.commands.some((command) => command.name() === first);
}

function buildProgram(context: Context): Command {
  const { io } = context;
  const program = new Command('vesselwright')
    .description('Grows synthetic vascular trees, solves the blood flow in them and hands both to simulations.')
    .version(VERSION)
    .showSuggestionAfterError()
    .enablePositionalOptions()
    .exitOverride()
    .configureOutput({
      writeOut: (text) => io.out(text),
      writeErr: (text) => io.err(text),
      outputError: (text, write) =>
        write(text.replace(/^error: /, 'vesselwright: ').replace(/\n\((.*)\)\n$/, ' ($1)\n')),
    })
    .addHelpText(
      'after',
      `\n${EXIT_HELP}\n\nExample:\n  $ vesselwright grow gel-block --out runs/gel\n  $ vesselwright view runs/gel\n`,
    );
  for (const add of COMMANDS) add(program, context);
  return program;
}

import { InputError, VERSION } from '../index.ts';
import { EXIT } from './exit-codes.ts';
import type { Io } from './io.ts';

/** Tells what was thrown and gives the exit code for it: a line a fault of the caller's, a stack for one of ours. */
export function tellFailure(error: unknown, io: Pick<Io, 'err'>): number {
  if (error instanceof InputError) {
    for (const { where, message } of error.faults) io.err(`${oneLine(where)}: ${oneLine(message)}\n`);
    return EXIT.input;
  }
  const stack = error instanceof Error ? (error.stack ?? String(error)) : String(error);
  io.err(`${stack}\n`);
  io.err(
    `This is a fault of vesselwright ${VERSION}, not of your input. Please report it with the lines above and what you ran.\n`,
  );
  return EXIT.fault;
}

/** Control characters of names and file contents would garble the terminal. */
function oneLine(text: string): string {
  let line = '';
  for (const character of text) {
    const code = character.codePointAt(0)!;
    line += code < 0x20 || (code >= 0x7f && code < 0xa0) ? ' ' : character;
  }
  return line;
}

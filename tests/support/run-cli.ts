import { mkdtempSync, readdirSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { main } from '../../src/cli/run-command.ts';
import { soundSpec } from './bend-spec.ts';

/** What a command line came to. */
export interface CliResult {
  readonly code: number;
  readonly out: string;
  readonly err: string;
}

/**
 * Runs a command line in this process.
 *
 * @param interrupted for commands that run until Ctrl-C: comes back when it is pressed; told what was said before
 */
export async function runCli(
  argv: readonly string[],
  interrupted: (out: string) => Promise<void> = async () => {},
): Promise<CliResult> {
  let out = '';
  let err = '';
  const code = await main(argv, {
    out: (text) => {
      out += text;
    },
    err: (text) => {
      err += text;
    },
    progress: () => {},
    untilInterrupted: () => interrupted(out),
  });
  return { code, out, err };
}

/** A temporary folder, and what it takes to be rid of it. */
export interface Scratch {
  readonly folder: string;
  path(...names: readonly string[]): string;
  /** Names in it, hidden ones too, sorted. */
  names(): string[];
  /** Removes one thing in it. */
  clear(name: string): void;
  remove(): void;
}

export function makeScratch(): Scratch {
  const folder = mkdtempSync(join(tmpdir(), 'vesselwright-cli-'));
  return {
    folder,
    path: (...names) => join(folder, ...names),
    names: () => readdirSync(folder).sort(),
    clear: (name) => rmSync(join(folder, name), { recursive: true, force: true }),
    remove: () => rmSync(folder, { recursive: true, force: true }),
  };
}

/** A small spec, quick to grow, as text. */
export function tinySpec(terminals = 12): string {
  const spec = soundSpec();
  spec.trees[0].terminals.count = terminals;
  return JSON.stringify(spec);
}

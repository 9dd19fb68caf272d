import { type ChildProcess, execFileSync, spawn } from 'node:child_process';
import { rmSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { makeScratch, type Scratch } from './run-cli.ts';

/* The built program as its own process, in a scratch folder. */

export const ROOT = fileURLToPath(new URL('../../', import.meta.url));
export const PROGRAM = `${ROOT}dist/cli/main.js`;

/** Brings `dist` up to date with the sources. */
export function buildProgram(): void {
  execFileSync(process.execPath, [`${ROOT}node_modules/typescript/bin/tsc`, '-b', 'src', 'src/node', 'src/cli'], {
    cwd: ROOT,
    stdio: 'inherit',
  });
}

export interface Ended {
  readonly code: number | null;
  readonly out: string;
  readonly err: string;
}

/** Written by the worker thread as it begins, into a file of the scratch folder. */
const READY = 'ready.mjs';
const TELL = `
import { writeFileSync } from 'node:fs';
import { isMainThread } from 'node:worker_threads';
if (!isMainThread) writeFileSync(new URL('./began', import.meta.url), '');
`;

export const pause = (ms: number): Promise<void> => new Promise((done) => setTimeout(done, ms));

/** A scratch folder and the program run in it. */
export class ProgramScratch {
  readonly scratch: Scratch = makeScratch();

  start(argv: readonly string[], env: Record<string, string> = {}): { child: ChildProcess; ended: Promise<Ended> } {
    const child = spawn(process.execPath, [PROGRAM, ...argv], {
      cwd: this.scratch.folder,
      env: { ...process.env, ...env },
    });
    let out = '';
    let err = '';
    child.stdout!.on('data', (chunk) => {
      out += chunk;
    });
    child.stderr!.on('data', (chunk) => {
      err += chunk;
    });
    const ended = new Promise<Ended>((done) => child.on('close', (code) => done({ code, out, err })));
    return { child, ended };
  }

  run(argv: readonly string[], env: Record<string, string> = {}): Promise<Ended> {
    return this.start(argv, env).ended;
  }

  /**
   * Starts the program and comes back once its worker thread begins: until then Ctrl-C ends a process of Node's by the
   * signal alone, and a busy machine needs a while to get that far.
   */
  async startReady(argv: readonly string[]): Promise<{ child: ChildProcess; ended: Promise<Ended> }> {
    const { scratch } = this;
    writeFileSync(scratch.path(READY), TELL);
    const started = this.start(argv, { NODE_OPTIONS: `--import=${scratch.path(READY)}` });
    await this.appears(/^began$/, started.child);
    rmSync(scratch.path('began'));
    rmSync(scratch.path(READY));
    return started;
  }

  /** Waits until a name in the scratch folder fits; false where the process ended first. */
  async appears(pattern: RegExp, child: ChildProcess): Promise<boolean> {
    while (child.exitCode === null && child.signalCode === null) {
      if (this.scratch.names().some((name) => pattern.test(name))) return true;
      await pause(1);
    }
    return false;
  }
}

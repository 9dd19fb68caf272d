import type { Progress } from '../index.ts';
import type { WriteGuard, WriteOptions } from '../node/index.ts';

/** All that a command sees of the world it runs in; tests give their own. */
export interface Io extends WriteGuard {
  /** Writes to standard output. */
  out(text: string): void;
  /** Writes to standard error. */
  err(text: string): void;
  /** Shows how far work has come, if anybody is watching; null takes the display away. */
  progress(progress: Progress | null): void;
  /** Told where a snapshot lies, or is about to, from which the command could go on, were it interrupted. */
  resumable?(path: string): void;
  /** Comes back when the user ends a command that runs until then. */
  untilInterrupted(): Promise<void>;
}

/** Options that most commands share. */
export interface CommonOptions {
  readonly quiet?: boolean | undefined;
  readonly json?: boolean | undefined;
}

/** A command under way: what it says goes through here, so that `--quiet` and `--json` mean the same everywhere. */
export class Talk {
  readonly io: Io;
  private readonly options: CommonOptions;

  constructor(io: Io, options: CommonOptions) {
    this.io = io;
    this.options = options;
  }

  /** Says how the work went: on standard output, or beside the JSON on standard error; not with `--quiet`. */
  say(text: string): void {
    if (this.options.quiet) return;
    if (this.options.json) this.io.err(`${text}\n`);
    else this.io.out(`${text}\n`);
  }

  /** Remarks on the input; not with `--quiet`. */
  note(text: string): void {
    if (!this.options.quiet) this.io.err(`note: ${text}\n`);
  }

  /** The result: the JSON document with `--json`, else the text, which `--quiet` leaves out. */
  result(text: () => string, json: () => string): void {
    if (this.options.json) this.io.out(`${json().trimEnd()}\n`);
    else if (!this.options.quiet) this.io.out(text());
  }

  readonly onProgress = (progress: Progress): void => {
    if (!this.options.quiet) this.io.progress(progress);
  };

  /** What writing needs to know; `where` is the option that the path came from. */
  writing(where: string): WriteOptions {
    return { where, temporary: this.io.temporary, commit: this.io.commit };
  }

  /** Takes the progress display away. */
  settle(): void {
    this.io.progress(null);
  }
}

import { createHash } from 'node:crypto';
import { accessSync, constants, existsSync, rmSync, statSync } from 'node:fs';
import { resolve } from 'node:path';
import {
  encodeState,
  InputError,
  inputError,
  type OnMoment,
  openState,
  type Spec,
  type StateHead,
  StateIn,
  StateOut,
  specToJson,
  VERSION,
} from '../index.ts';
import { withSource } from './large-files.ts';
import { withFiles } from './system-faults.ts';
import type { WriteOptions } from './temporary.ts';
import { writeFiles } from './write-files.ts';

/** A snapshot takes at most this part of the time: the larger it is, the longer until the next. */
const SHARE = 0.05;

/** How a run is saved on its way. */
export interface SnapshotOptions {
  /** s, ≥ 0; least time from the beginning to the first snapshot, and between two. */
  readonly every: number;
  /** Whether to go on from the snapshot that is there. */
  readonly resume: boolean;
  /** Told where a snapshot to go on from lies, or is about to. */
  readonly onPlace?: ((path: string) => void) | undefined;
  /** Told once why no snapshot can be written; the run goes on without. */
  readonly onTrouble?: ((why: string) => void) | undefined;
  /** Time spent that a budget counts: asked when the run is saved, told when it goes on. */
  readonly clock?: { spent(): number; goOn(spent: number): void } | undefined;
}

/** Path of the snapshot of a run: beside its folder. */
export function snapshotPath(out: string): string {
  return `${out.replace(/[/\\]+$/, '')}.snapshot`;
}

/** What a run is of: its spec, program and surfaces, and whether a clock ends its refinement. */
export function workOf(spec: Spec, surfaces: ReadonlyMap<string, Uint8Array>, timed: boolean): StateHead {
  const hash = createHash('sha256');
  hash.update(specToJson(spec, { version: VERSION })).update(timed ? 'timed' : 'counted');
  for (const name of [...surfaces.keys()].sort()) hash.update(`\u0000${name}\u0000`).update(surfaces.get(name)!);
  return { program: `vesselwright ${VERSION}`, work: hash.digest('hex') };
}

/** The snapshot of one run under way. Whether and when it is written depends on the clock; what the run comes to does not. */
export class SnapshotFile {
  readonly #path: string;
  readonly #head: StateHead;
  readonly #options: SnapshotOptions;
  readonly #writing: WriteOptions;
  #due: number;
  #broken = false;

  /** @param out folder that the run is to be written to */
  constructor(out: string, head: StateHead, options: SnapshotOptions, writing: WriteOptions) {
    this.#path = snapshotPath(out);
    this.#head = head;
    this.#options = options;
    this.#writing = writing;
    this.#due = performance.now() + 1000 * options.every;
  }

  /**
   * Runs a step with the saved state that it is to go on from; with none where the run is to begin.
   *
   * @throws InputError where there is no snapshot, or it is broken or of other work
   */
  withSaved<T>(step: (saved: StateIn | undefined) => T): T {
    const { resume, clock, onPlace } = this.#options;
    if (!resume) return step(undefined);
    const path = this.#path;
    if (!existsSync(path) || !statSync(path).isFile()) {
      const message = `got no snapshot ${path}, expected one that an interrupted run has left; without --resume the run begins anew`;
      throw inputError('snapshot', '--resume', message);
    }
    withFiles('--resume', path, 'a snapshot', () => accessSync(path, constants.R_OK));
    onPlace?.(path);
    return withSource(path, path, (source) => {
      const saved = new StateIn(openState(source, this.#head));
      clock?.goOn(saved.reals('clock')[0]!);
      return step(saved);
    });
  }

  /** Writes a snapshot where one is due. */
  readonly onMoment: OnMoment = (save) => {
    const begin = performance.now();
    if (this.#broken || begin < this.#due) return;
    const out = new StateOut();
    out.list('clock', 'f64', [this.#options.clock?.spent() ?? 0]);
    save(out);
    this.#options.onPlace?.(this.#path);
    try {
      writeFiles([{ path: this.#path, content: () => encodeState(this.#head, out.columns) }], this.#writing);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      this.#broken = true;
      this.#options.onTrouble?.(`no snapshot can be written: ${error.message}`);
    }
    const end = performance.now();
    this.#due = end + Math.max(1000 * this.#options.every, (end - begin) / SHARE);
  };

  /** Removes the snapshot of a run that is done. */
  remove(): void {
    rmSync(resolve(this.#path), { force: true });
  }
}

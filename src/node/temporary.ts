import { existsSync, mkdirSync, readdirSync, renameSync, rmdirSync, rmSync } from 'node:fs';
import { hostname } from 'node:os';
import { basename, dirname, join } from 'node:path';

/** How a program that can be interrupted at any moment keeps track of what is under way. */
export interface WriteGuard {
  /** Told of a temporary path before it is made: whoever ends this process removes it. */
  readonly temporary?: ((path: string) => void) | undefined;
  /** Runs a step that must not be cut short: a few renames. */
  readonly commit?: ((step: () => void) => void) | undefined;
}

export interface WriteOptions extends WriteGuard {
  /** What the path came from, for faults, e.g. `--out`. */
  readonly where: string;
}

/*
 * Outputs are made beside their place under a name like `.run.myhost-4711-0.partial` and renamed into it. What a killed
 * process leaves behind is known by its name: of this machine, and of a process that is gone.
 */

/** `partial`: being made. `old`: what was there before, for the moment between two renames. */
type Ending = 'partial' | 'old';

const HOST = hostname().replaceAll(/[^A-Za-z0-9]/g, '') || 'host';
let made = 0;

/** A name beside a place that nobody else uses. */
export function temporaryBeside(place: string, ending: Ending): string {
  return join(dirname(place), `.${basename(place)}.${HOST}-${process.pid}-${made++}.${ending}`);
}

/**
 * Removes what processes that are gone left beside a place; a result that one of them had set aside and not yet
 * replaced goes back to its place.
 */
export function clearStale(place: string): void {
  const folder = dirname(place);
  if (!existsSync(folder)) return;
  const start = `.${basename(place)}.${HOST}-`;
  for (const name of readdirSync(folder)) {
    if (!name.startsWith(start)) continue;
    const match = /^(\d+)-\d+\.(partial|old)$/.exec(name.slice(start.length));
    if (match === null || isAlive(Number(match[1]))) continue;
    const path = join(folder, name);
    if (match[2] === 'old' && !existsSync(place)) renameSync(path, place);
    else rmSync(path, { recursive: true, force: true });
  }
}

/**
 * Runs a step with the folders above a place in being; those made for it go again where the step fails.
 *
 * @param place absolute
 */
export function withParents(place: string, step: () => void): void {
  const first = mkdirSync(dirname(place), { recursive: true });
  try {
    step();
  } catch (error) {
    if (first !== undefined) removeEmpty(dirname(place), dirname(first));
    throw error;
  }
}

/** Removes empty folders from one up to, and without, another. */
function removeEmpty(from: string, stop: string): void {
  for (let folder = from; folder !== stop; folder = dirname(folder)) {
    if (readdirSync(folder).length > 0) return;
    rmdirSync(folder);
  }
}

function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code !== 'ESRCH';
  }
}

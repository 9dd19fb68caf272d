import { existsSync } from 'node:fs';
import { join } from 'node:path';
import type { Command } from 'commander';
import { CAUTION, inputError, parseSpec, type Spec, specToJson } from '../index.ts';
import {
  type GrownFolder,
  growToFolder,
  placeForFolder,
  RUN_FOLDER,
  readSpec,
  type SnapshotOptions,
  snapshotPath,
} from '../node/index.ts';
import { addCommonOptions, addExample, addRequired, type Context, runWork } from './command.ts';
import { EXIT } from './exit-codes.ts';
import type { CommonOptions, Talk } from './io.ts';
import { type RefineOption, refineOf, wholeNumber } from './option-values.ts';
import { specPath } from './preset-files.ts';
import { formatPower, formatShare } from './printed.ts';

/** Most terminals of a tree that a spec may ask for. */
const MOST_TERMINALS = 2e7;
/** s between two snapshots of a run, and until the first; and what says otherwise, for tests. */
const SNAPSHOT_PAUSE = 20;
const PAUSE_VARIABLE = 'VESSELWRIGHT_SNAPSHOT_SECONDS';

interface GrowArguments extends CommonOptions {
  readonly out: string;
  readonly seed?: string;
  readonly terminals?: string;
  readonly workers?: string;
  readonly refine?: string;
  readonly resume?: boolean;
}

export function addGrow(program: Command, context: Context): void {
  const command = program
    .command('grow')
    .summary('grow trees from a spec into a run folder')
    .description(
      'Grows the trees of a spec, refines and solves them, checks every promise, and writes a run folder:\n' +
        'tree.vtp, spec.json (the spec as used), report.json, report.html, and a copy of each surface file.',
    )
    .argument('<spec>', 'path of a spec (JSON), or the name of a preset');
  addRequired(command, '--out <run>', 'folder to write; an earlier run there is replaced');
  command
    .option('--seed <seed>', 'seed in place of the spec’s')
    .option('--terminals <count>', 'number of terminals a tree, in place of the spec’s count')
    .option('--workers <count>', 'threads that grow, one for each core by default; the result never depends on it')
    .option('--refine <budget>', 'none, quick, thorough, annealed, or a time such as 20s, in place of the spec’s');
  command.option('--resume', 'go on from <run>.snapshot, which the same command has left when it was interrupted');
  addCommonOptions(command, 'print the summary as one JSON document');
  addExample(
    command,
    'grow gel-block --out runs/gel --terminals 500',
    'grow my-spec.json --out runs/mine --refine 20s',
  );
  command.action((spec: string, options: GrowArguments) =>
    runWork(context, options, (talk) => grow(spec, options, talk)),
  );
}

function grow(given: string, options: GrowArguments, talk: Talk): number {
  const refine = options.refine === undefined ? null : refineOf(options.refine);
  const workers = options.workers === undefined ? undefined : wholeNumber(options.workers, '--workers', 1, 1024);
  placeForFolder(options.out, RUN_FOLDER, '--out');
  const read = readSpec(specPath(given));
  const spec = overrideSpec(read.spec, options, refine);
  const budget = refine !== null && 'seconds' in refine ? refine.seconds : null;
  const clock = new RefineClock(budget, talk);
  const grown = growToFolder(
    { ...read, spec },
    options.out,
    {
      workers,
      onProgress: clock.onProgress,
      refineEnough: budget === null ? undefined : clock.enough,
      snapshot: snapshotOf(options, clock, talk),
    },
    talk.writing('--out'),
  );
  talk.settle();
  const { result } = grown;
  const held = result.check.held && result.shortfalls.length === 0;
  talk.result(
    () => describeRun(grown, options.out),
    () => JSON.stringify(summariseRun(grown, options.out, held), null, 2),
  );
  return held ? EXIT.held : EXIT.broken;
}

/** A run that takes long is saved on its way, so that it can go on after an interruption. */
function snapshotOf(options: GrowArguments, clock: RefineClock, talk: Talk): SnapshotOptions {
  const path = snapshotPath(options.out);
  const resume = options.resume ?? false;
  if (!resume && existsSync(path))
    talk.note(`${path} of an interrupted run is there; this run begins anew all the same`);
  const asked = process.env[PAUSE_VARIABLE];
  return {
    every: asked === undefined ? SNAPSHOT_PAUSE : Number(asked),
    resume,
    onPlace: (place) => talk.io.resumable?.(place),
    onTrouble: (why) => talk.note(why),
    clock,
  };
}

/** The spec with what the command line says instead; judged as if it had said so itself. */
function overrideSpec(spec: Spec, options: GrowArguments, refine: RefineOption | null): Spec {
  let trees = spec.trees;
  if (options.terminals !== undefined) {
    const count = wholeNumber(options.terminals, '--terminals', 1, MOST_TERMINALS);
    trees = trees.map((tree) => {
      const { terminals, name } = tree;
      if (terminals.by === 'count') return { ...tree, terminals: { ...terminals, count } };
      const message = `got ${count}, but tree ${name} asks for its terminals by ${terminals.by}, expected a spec with a count`;
      throw inputError('not-a-count', '--terminals', message);
    });
  }
  const used: Spec = {
    ...spec,
    trees,
    seed: options.seed ?? spec.seed,
    refine: refine !== null && 'word' in refine ? refine.word : spec.refine,
  };
  if (options.terminals === undefined && options.seed === undefined) return used;
  parseSpec(specToJson(used), 'spec');
  return used;
}

/** Ends refinement after a time, and shows the time as its progress. */
class RefineClock {
  readonly #budget: number | null;
  readonly #talk: Talk;
  #begin: number | null = null;
  #before = 0;

  constructor(budget: number | null, talk: Talk) {
    this.#budget = budget;
    this.#talk = talk;
  }

  readonly onProgress: Talk['onProgress'] = (progress) => {
    if (this.#budget === null || progress.stage !== 'refine') return this.#talk.onProgress(progress);
    this.#talk.onProgress({ stage: 'refine', done: Math.min(this.#spent(), this.#budget), total: this.#budget });
  };

  readonly enough = (): boolean => this.#spent() >= (this.#budget ?? 0);

  /** s so far; 0 where refinement has not begun. */
  spent(): number {
    return this.#begin === null ? this.#before : this.#spent();
  }

  /** Counts time that an interrupted run has spent. */
  goOn(spent: number): void {
    this.#before = spent;
  }

  /** s since it was first asked, and before. */
  #spent(): number {
    const now = performance.now();
    this.#begin ??= now;
    return this.#before + (now - this.#begin) / 1000;
  }
}

/** Terminals served and asked for, a tree. */
function serviceOf({ result, report }: GrownFolder): { name: string; served: number; asked: number | null }[] {
  return result.spec.trees.map((tree, t) => {
    const { terminals } = tree;
    const asked =
      terminals.by === 'count' ? terminals.count : terminals.by === 'points' ? terminals.points.length : null;
    return { name: tree.name, served: report.trees[t]!.terminals, asked };
  });
}

function describeRun(grown: GrownFolder, out: string): string {
  const { result, report, files } = grown;
  const broken = result.check.promises.filter((promise) => promise.held === false);
  const unchecked = result.check.promises.filter((promise) => promise.held === null).length;
  const kept = result.check.promises.length - broken.length - unchecked;
  const { fraction } = report.volumes;
  const lines = [
    `${report.name ?? 'run'}, seed ${result.spec.seed}`,
    ...serviceOf(grown).map(
      ({ name, served, asked }) => `  tree ${name}: ${served}${asked === null ? '' : ` of ${asked}`} terminals served`,
    ),
    `  vessels: ${report.counts.vessels}${fraction === null ? '' : `, ${formatShare(fraction)} of the tissue’s volume`}`,
    `  power: ${formatPower(report.cost.total_W)} (pumping ${formatPower(report.cost.pumping_W)}, keeping the blood ${formatPower(report.cost.maintenance_W)})`,
    `  promises: ${kept} held, ${broken.length} broken, ${unchecked} not asked for or not checked`,
    ...broken.map(({ title, failures, where }) => `    BROKEN: ${title}: ${failures} times, worst at ${where ?? '?'}`),
    ...result.shortfalls.map((sentence) => `    NOT MET: ${sentence}`),
    `  written: ${join(out, '/')}: ${files.join(', ')}`,
    `  look at it: vesselwright view ${out}`,
    '',
    CAUTION,
  ];
  return `${lines.join('\n')}\n`;
}

function summariseRun(grown: GrownFolder, out: string, held: boolean): unknown {
  const { result, report, files } = grown;
  return {
    out,
    files,
    held,
    stopped: result.stopped,
    seed: result.spec.seed,
    trees: serviceOf(grown),
    counts: report.counts,
    cost: report.cost,
    volumes: report.volumes,
    promises: result.check.promises,
    shortfalls: result.shortfalls,
    resources: report.resources,
    caution: CAUTION,
  };
}

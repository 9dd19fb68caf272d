import { availableParallelism } from 'node:os';
import {
  type GrowOptions,
  type GrowResult,
  growRun,
  type Report,
  renderReport,
  reportRun,
  type Spec,
  type StateIn,
  splitTreePath,
  type TreeRecord,
  withResources,
} from '../index.ts';
import { startCrew } from './crew.ts';
import { Meter } from './meter.ts';
import { placeForFolder, RUN_FOLDER } from './out-folder.ts';
import { type SpecFiles, useBaseNames } from './read-spec.ts';
import { SnapshotFile, type SnapshotOptions, workOf } from './snapshot-file.ts';
import type { WriteOptions } from './temporary.ts';
import { type OutFile, writeFolder } from './write-folder.ts';

export interface GrownFolder {
  readonly result: GrowResult;
  readonly report: Report;
  /** Names of the files written; none where growth was cancelled. */
  readonly files: readonly string[];
}

/**
 * Grows a spec into a run folder. Surfaces are copied beside the tree and named by their base names before growth
 * begins, so that growing `spec.json` of the folder again gives the same `tree.vtp`.
 *
 * @param options `workers`: threads that grow, ≥ 1, one for each core where it is not given; `snapshot`: whether and how
 *                the run is saved on its way; the tree is the same
 * @throws InputError for what is wrong with spec, surfaces or place; nothing is written then
 */
export function growToFolder(
  read: SpecFiles,
  out: string,
  options: Omit<GrowOptions, 'crew' | 'onMoment' | 'resume'> & {
    readonly workers?: number | undefined;
    readonly snapshot?: SnapshotOptions | undefined;
  },
  writing: WriteOptions,
): GrownFolder {
  placeForFolder(out, RUN_FOLDER, writing.where);
  const home = useBaseNames(read);
  const meter = new Meter();
  meter.see({ stage: 'tissue' });
  const { workers = availableParallelism(), snapshot, ...rest } = options;
  const head = workOf(home.spec, home.bytes, options.refineEnough !== undefined);
  const file = snapshot === undefined ? null : new SnapshotFile(out, head, snapshot, writing);
  const crew = workers > 1 && isLarge(home.spec) ? startCrew(workers, home.spec, home.surfaces) : undefined;
  let result: GrowResult;
  try {
    const grow = (resume: StateIn | undefined): GrowResult =>
      growRun(home.spec, home.surfaces, {
        ...rest,
        crew,
        resume,
        onMoment: file?.onMoment,
        onProgress: (progress) => {
          meter.see(progress);
          options.onProgress?.(progress);
        },
        onCost: (stage, cost) => {
          meter.cost(stage, cost);
          options.onCost?.(stage, cost);
        },
      });
    result = file === null ? grow(undefined) : file.withSaved(grow);
  } finally {
    crew?.close();
  }
  meter.see({ stage: 'report' });
  let report = withResources(reportRun(result, undefined), meter.read());
  if (result.stopped === 'cancelled') return { result, report, files: [] };
  meter.see({ stage: 'write' });
  const files = runFiles(result.record, home.bytes, () => {
    report = withResources(report, meter.read());
    return report;
  });
  writeFolder(out, RUN_FOLDER, files, writing);
  file?.remove();
  return { result, report, files: files.map((file) => file.name) };
}

/** Terminals from which on threads are worth starting. */
const MANY_TERMINALS = 8192;

function isLarge(spec: Spec): boolean {
  let count = 0;
  for (const { terminals } of spec.trees) {
    if (terminals.by === 'spacing') return true;
    count += terminals.by === 'count' ? terminals.count : terminals.points.length;
  }
  return count >= MANY_TERMINALS;
}

/** Writes a run folder of a tree that is there already. */
export function writeRun(
  out: string,
  record: TreeRecord,
  report: Report,
  surfaces: ReadonlyMap<string, Uint8Array>,
  writing: WriteOptions,
): readonly string[] {
  const files = runFiles(record, surfaces, () => report);
  writeFolder(out, RUN_FOLDER, files, writing);
  return files.map((file) => file.name);
}

/**
 * The files of a run in the order they are written.
 *
 * @param report asked once, when all but the report itself is on the disk
 */
function runFiles(record: TreeRecord, surfaces: ReadonlyMap<string, Uint8Array>, report: () => Report): OutFile[] {
  const { format } = splitTreePath('tree.vtp', 'tree.vtp');
  const tree = format.encode(record)[0]!;
  let told: Report | null = null;
  const once = (): Report => {
    told ??= report();
    return told;
  };
  return [
    { name: 'tree.vtp', content: tree.pieces ?? tree.bytes },
    { name: 'spec.json', content: record.provenance ?? '' },
    { name: 'report.json', content: () => `${JSON.stringify(once(), null, 2)}\n` },
    { name: 'report.html', content: () => renderReport(once()) },
    ...[...surfaces].map(([name, content]) => ({ name, content })),
  ];
}

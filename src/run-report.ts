import type { CheckResult } from './check/result.ts';
import { measurePower } from './flow/power.ts';
import { buildReport } from './report/build.ts';
import type { PromiseLine, ReportInput } from './report/input.ts';
import type { Report } from './report/report.ts';
import { type GrowResult, VERSION } from './run.ts';
import type { Tissue } from './tissue/tissue.ts';

/** What a report is made of: a run as grown, or a tree solved again, whose tissue may not be known. */
export type ReportedRun = Pick<GrowResult, 'spec' | 'record' | 'check' | 'shortfalls'> & {
  readonly tissue: Tissue | null;
};

/** The report of a run. */
export function reportRun(result: ReportedRun, resources: ReportInput['resources']): Report {
  const { spec, record, tissue, check, shortfalls } = result;
  const stubs = `the first vessel of a tree may lead in from outside the tissue`;
  return buildReport({
    program: `vesselwright ${VERSION}`,
    record,
    power: measurePower(record.forest, spec.blood.viscosity.value, spec.blood.maintenance),
    tissueVolume: tissue?.volume ?? null,
    askedPressures: spec.trees.map((tree) => tree.terminals.pressure),
    promises: promiseLines(check),
    notes: [...shortfalls, stubs],
    resources,
  });
}

/** A check's promises as lines of a report. */
export function promiseLines(check: CheckResult): PromiseLine[] {
  return check.promises.map(({ id, title, sense, limit, worst, unit, where, held, checked, note }) => ({
    id,
    promise: title,
    sense,
    limit,
    // JSON has no word for what is not finite.
    worst: worst !== null && Number.isFinite(worst) ? worst : null,
    unit,
    where,
    held,
    checked,
    note,
  }));
}

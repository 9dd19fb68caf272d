import type { ReportInput } from './input.ts';
import type { Report } from './report.ts';

/** Time and memory as a report holds them. */
export function resourcesOf(resources: ReportInput['resources']): Report['resources'] {
  return {
    wall_time_s: resources?.wallTime ?? null,
    peak_memory_bytes: resources?.peakMemory ?? null,
    stages: resources?.stages ?? [],
    cost_against_time: resources?.costAgainstTime ?? [],
  };
}

/** A report with time and memory as they stand now: the rest of it takes time to make and to write. */
export function withResources(report: Report, resources: ReportInput['resources']): Report {
  return { ...report, resources: resourcesOf(resources) };
}

import type { TreeRecord } from '../tree/forest.ts';

/** A promise as recomputed from the result, in numbers that a machine reads. */
export interface PromiseLine {
  /** Short machine word, e.g. `containment`. */
  readonly id: string;
  /** What was promised, a short sentence. */
  readonly promise: string;
  /** `at-least`: values below the limit break the promise; `at-most`: values above it. */
  readonly sense: 'at-least' | 'at-most';
  /** In `unit`, all digits. */
  readonly limit: number;
  /** The worst value found, in `unit`, all digits; null where nothing was measured, or it is not finite. */
  readonly worst: number | null;
  /** SI, `1` for a plain number. */
  readonly unit: string;
  /** Vessel or place of the worst value. */
  readonly where: string | null;
  /** Null: could not be looked at, e.g. no flow solution in the file. */
  readonly held: boolean | null;
  /** How many things were looked at. */
  readonly checked: number;
  /** Slack, or why the promise could not be looked at; may be empty. */
  readonly note: string;
}

/** The cost at a moment of growth or refinement. */
export interface CostPoint {
  /** Costs of the stage `growth`, which rise with every terminal, are plotted apart from all others. */
  readonly stage: string;
  /** s since the run began. */
  readonly time_s: number;
  /** W */
  readonly cost_W: number;
}

/** All that a report is made of. */
export interface ReportInput {
  /** Name and version of the program, e.g. `vesselwright 0.1.0`. */
  readonly program: string;
  readonly record: TreeRecord;
  /** W and m³, as measured from geometry and flow. */
  readonly power: {
    readonly pumping: number;
    readonly maintenance: number;
    readonly total: number;
    readonly volume: number;
  };
  /** m³, or null where no tissue is known. */
  readonly tissueVolume: number | null;
  /** (trees) Pa asked of the terminals, null where none was; may be left out. */
  readonly askedPressures?: readonly (number | null)[] | undefined;
  readonly promises: readonly PromiseLine[];
  /** Sentences for the reader: what was supplied, cut or not met. */
  readonly notes?: readonly string[] | undefined;
  readonly resources?:
    | {
        readonly wallTime?: number | undefined;
        readonly peakMemory?: number | undefined;
        readonly stages?: readonly { readonly stage: string; readonly time_s: number }[] | undefined;
        readonly costAgainstTime?: readonly CostPoint[] | undefined;
      }
    | undefined;
}

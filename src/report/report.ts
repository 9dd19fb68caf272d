import type { CostPoint, PromiseLine } from './input.ts';

/** Mean and spread of a sample; the deviation is that of a sample (n − 1), 0 for a single value. */
export interface Spread {
  readonly mean: number;
  readonly deviation: number;
}

/** One Strahler order of the whole forest. */
export interface OrderStatistics {
  readonly order: number;
  /** Stretches between junctions; bends do not count. */
  readonly segments: number;
  /** Maximal chains of segments of this order. */
  readonly elements: number;
  /** Over elements; an element's diameter is the mean along its length. */
  readonly diameter_mean_m: number;
  readonly diameter_deviation_m: number;
  /** Over elements, along the way of their tubes. */
  readonly length_mean_m: number;
  readonly length_deviation_m: number;
  /** Means along the length of all vessels of the order; null before a flow solve. */
  readonly pressure_mean_Pa: number | null;
  readonly wall_shear_mean_Pa: number | null;
}

/** Angles between vessels that leave one junction, every pair of them. */
export interface AngleStatistics {
  readonly pairs: number;
  readonly mean_deg: number;
  readonly deviation_deg: number;
  readonly bins: readonly { readonly from_deg: number; readonly to_deg: number; readonly count: number }[];
}

/** Ratios of successive orders, 10^|slope| of log10 over order. */
export interface HortonRatios {
  /** Number of elements. */
  readonly branching: number;
  readonly diameter: number;
  readonly length: number;
}

/** How much tissue, times its demand, the terminals of a tree serve. */
export interface TerritorySummary {
  readonly min_m3: number;
  readonly median_m3: number;
  readonly max_m3: number;
  /** Standard deviation of the terminals' territories over their mean. */
  readonly variation: number;
}

export interface TreeSummary {
  readonly name: string;
  readonly kind: 'supply' | 'drain';
  readonly vessels: number;
  readonly terminals: number;
  readonly root_flow_m3_s: number;
  readonly root_radius_m: number;
  readonly root_pressure_Pa: number | null;
  readonly terminal_pressure: {
    readonly min_Pa: number;
    /** By flow. */
    readonly mean_Pa: number;
    readonly max_Pa: number;
    readonly asked_Pa: number | null;
  } | null;
  /** Time between root and terminals. */
  readonly transit: { readonly min_s: number; readonly mean_s: number; readonly max_s: number } | null;
  /** Of the terminals, m³ at demand 1; null where they were not measured. */
  readonly territory: TerritorySummary | null;
}

/** What report.json holds. All but `resources` is the same for the same spec and seed. */
export interface Report {
  readonly format_version: 1;
  readonly program: string;
  readonly caution: string;
  readonly name: string | null;
  readonly counts: {
    readonly trees: number;
    readonly vessels: number;
    readonly terminals: number;
    readonly junctions: number;
    readonly bends: number;
  };
  readonly cost: { readonly pumping_W: number; readonly maintenance_W: number; readonly total_W: number };
  readonly volumes: {
    readonly vessel_m3: number;
    readonly tissue_m3: number | null;
    /** Vessel over tissue. */
    readonly fraction: number | null;
  };
  readonly trees: readonly TreeSummary[];
  readonly promises: readonly PromiseLine[];
  readonly orders: readonly OrderStatistics[];
  readonly angles: AngleStatistics;
  /** Null below three orders. */
  readonly horton: HortonRatios | null;
  readonly notes: readonly string[];
  /** The resolved spec, or null where the tree came from elsewhere. */
  readonly provenance: unknown;
  readonly resources: {
    readonly wall_time_s: number | null;
    readonly peak_memory_bytes: number | null;
    readonly stages: readonly { readonly stage: string; readonly time_s: number }[];
    readonly cost_against_time: readonly CostPoint[];
  };
}

import { type Fault, InputError } from '../../core/errors.ts';
import type { Tally } from '../result.ts';
import { ExactSum } from '../sums.ts';
import { numberColumn, readTable, textColumn } from './table-file.ts';

/** `boundary.csv`, one row a cap. */
export interface BoundaryTable {
  readonly count: number;
  readonly name: readonly string[];
  readonly type: readonly ('inlet' | 'outlet')[];
  /** m */
  readonly radius: Float64Array;
  /** (3n) m */
  readonly centre: Float64Array;
  /** (3n) */
  readonly normal: Float64Array;
  /** m³/s, magnitude */
  readonly flow: Float64Array;
  /** Pa */
  readonly pressure: Float64Array;
  /** m/s */
  readonly velocity: Float64Array;
  readonly reynolds: Float64Array;
  readonly tree: readonly string[];
  readonly vessel: readonly string[];
  /** Pa·s/m³ as printed: nothing at a tree's root, 0 where nothing was cut off. */
  readonly resistance: readonly string[];
  /** Network that the pressures are those of, and Pa lost in that of axis lengths and that of effective ones; null where not told. */
  readonly lengths: readonly string[] | null;
  readonly drops: readonly [axis: Float64Array, effective: Float64Array] | null;
}

const NEEDED = [
  ...['patch', 'type', 'radius_m', 'cx', 'cy', 'cz', 'nx', 'ny', 'nz', 'flow_m3_s', 'pressure_Pa'],
  ...['mean_velocity_m_s', 'reynolds', 'resistance_Pa_s_m3', 'tree', 'vessel'],
];
const DROPS = ['drop_axis_Pa', 'drop_effective_Pa'] as const;

/**
 * Reads a boundary table.
 *
 * @throws InputError naming the lines that are broken
 */
export function readBoundary(file: string, text: string): BoundaryTable {
  const table = readTable(file, text, NEEDED);
  const type = textColumn(table, 'type');
  const faults: Fault[] = [];
  type.forEach((word, k) => {
    if (word === 'inlet' || word === 'outlet') return;
    const message = `type: got "${word}", expected inlet or outlet`;
    faults.push({ code: 'bad-type', where: `${file}:${table.lines[k]}`, message });
  });
  if (faults.length > 0) throw new InputError(faults);
  const triples = (prefix: string) => {
    const [x, y, z] = ['x', 'y', 'z'].map((axis) => numberColumn(table, prefix + axis)) as [
      Float64Array,
      Float64Array,
      Float64Array,
    ];
    return Float64Array.from({ length: 3 * x.length }, (_, k) => [x, y, z][k % 3]![Math.floor(k / 3)]!);
  };
  return {
    count: table.rows.length,
    name: textColumn(table, 'patch'),
    type: type as ('inlet' | 'outlet')[],
    radius: numberColumn(table, 'radius_m'),
    centre: triples('c'),
    normal: triples('n'),
    flow: numberColumn(table, 'flow_m3_s'),
    pressure: numberColumn(table, 'pressure_Pa'),
    velocity: numberColumn(table, 'mean_velocity_m_s'),
    reynolds: numberColumn(table, 'reynolds'),
    tree: textColumn(table, 'tree'),
    vessel: textColumn(table, 'vessel'),
    resistance: textColumn(table, 'resistance_Pa_s_m3'),
    lengths: table.columns.includes('lengths') ? textColumn(table, 'lengths') : null,
    drops: DROPS.every((column) => table.columns.includes(column))
      ? [numberColumn(table, DROPS[0]), numberColumn(table, DROPS[1])]
      : null,
  };
}

export interface BoundaryTallies {
  /** Sees |Σ inlets − Σ outlets| / Σ inlets a tree; named by its first row. */
  readonly flow: Tally;
  /** Sees ||n| − 1| a row. */
  readonly normal: Tally;
  /** Sees the relative difference of velocity and Reynolds number from those recomputed. */
  readonly values: Tally;
  /** Sees, per tree, how far its highest outlet pressure exceeds its lowest inlet pressure, in Pa. */
  readonly pressure: Tally;
}

/**
 * Measures a boundary table against itself.
 *
 * @param kinematic ρ/μ in s/m², or NaN where the folder does not say
 */
export function measureBoundary(table: BoundaryTable, kinematic: number, tallies: BoundaryTallies): void {
  const trees = [...new Set(table.tree)];
  for (const tree of trees) {
    const inward = new ExactSum();
    const outward = new ExactSum();
    let lowestIn = Infinity;
    let highestOut = -Infinity;
    for (let k = 0; k < table.count; k++) {
      if (table.tree[k] !== tree) continue;
      if (table.type[k] === 'inlet') {
        inward.add(table.flow[k]!);
        lowestIn = Math.min(lowestIn, table.pressure[k]!);
      } else {
        outward.add(table.flow[k]!);
        highestOut = Math.max(highestOut, table.pressure[k]!);
      }
    }
    const first = table.tree.indexOf(tree);
    tallies.flow.see(Math.abs(inward.total - outward.total) / inward.total, first);
    tallies.pressure.see(highestOut - lowestIn, first);
  }
  for (let k = 0; k < table.count; k++) {
    const r = table.radius[k]!;
    const size = Math.hypot(table.normal[3 * k]!, table.normal[3 * k + 1]!, table.normal[3 * k + 2]!);
    tallies.normal.see(Math.abs(size - 1), k);
    const velocity = table.flow[k]! / (Math.PI * r * r);
    let off = Math.abs(table.velocity[k]! / velocity - 1);
    // Re = 2ρQ/(πrμ) = 2 v r ρ/μ
    if (!Number.isNaN(kinematic))
      off = Math.max(off, Math.abs(table.reynolds[k]! / (2 * velocity * r * kinematic) - 1));
    tallies.values.see(off, k);
  }
}

import type { BoundaryRow } from '../../mesh/boundary-table.ts';
import type { ProfileRow } from '../../mesh/inlet-profile.ts';
import type { NetworkRow } from '../../mesh/network-table.ts';
import { printReal } from '../text/numbers.ts';
import { TextWriter } from '../text/writer.ts';

const BOUNDARY = [
  ...['patch', 'type', 'radius_m', 'cx', 'cy', 'cz', 'nx', 'ny', 'nz', 'flow_m3_s', 'pressure_Pa'],
  ...['mean_velocity_m_s', 'reynolds', 'resistance_Pa_s_m3', 'windkessel_r1', 'windkessel_r2', 'windkessel_c'],
  ...['tree', 'vessel'],
];
const DROPS = ['lengths', 'drop_axis_Pa', 'drop_effective_Pa'];

/** Which network the pressures of the tables are those of, and the drops of both between a tree's root and a cap. */
export interface DropRow {
  readonly lengths: 'axis' | 'effective';
  /** Pa, ≥ 0 */
  readonly axis: number;
  readonly effective: number;
}

/**
 * `boundary.csv`, a line a cap; metres whatever the unit of the surface files.
 *
 * `resistance_Pa_s_m3` is empty at a tree's root and 0 where nothing was cut off; the windkessel columns are empty.
 */
export function encodeBoundaryCsv(rows: readonly BoundaryRow[], drops: readonly DropRow[] | null = null): Uint8Array {
  const out = new TextWriter();
  out.add(`${[...BOUNDARY, ...(drops === null ? [] : DROPS)].join(',')}\n`);
  for (const [k, row] of rows.entries()) {
    const drop = drops?.[k];
    const cells = [
      row.patch,
      row.type,
      ...[row.radius, ...row.centre, ...row.normal, row.flow, row.pressure, row.velocity, row.reynolds].map(printPlain),
      row.resistance === null ? '' : printReal(row.resistance),
      '',
      '',
      '',
      String(row.tree),
      String(row.vessel),
      ...(drop === undefined ? [] : [drop.lengths, printReal(drop.axis), printReal(drop.effective)]),
    ];
    out.add(`${cells.join(',')}\n`);
  }
  return out.bytes();
}

/** A number as text; a negative zero, which a normal along an axis has, as 0. */
function printPlain(value: number): string {
  return printReal(value + 0);
}

const NETWORK = [
  ...['segment', 'from', 'to', 'x0', 'y0', 'z0', 'x1', 'y1', 'z1', 'r0_m', 'r1_m', 'length_m'],
  ...['flow_m3_s', 'p0_Pa', 'p1_Pa'],
];

/** `network.csv`, a line a tube, metres; blood runs from `from` to `to`. Effective lengths come last where they are known. */
export function encodeNetworkCsv(rows: readonly NetworkRow[]): Uint8Array {
  const out = new TextWriter();
  const known = rows.every((row) => row.effectiveLength !== null);
  out.add(`${[...NETWORK, ...(known ? ['effective_length_m'] : [])].join(',')}\n`);
  for (const row of rows) {
    const numbers = [...row.start, ...row.end, row.radius, row.radius, row.length, row.flow, ...row.pressures];
    if (known) numbers.push(row.effectiveLength!);
    out.add(`${row.segment},${row.from},${row.to},${numbers.map(printReal).join(',')}\n`);
  }
  return out.bytes();
}

/** `inlet_profile.csv`, a line a corner of an inlet cap, metres; taken linear over triangles it carries the table's flow. */
export function encodeProfileCsv(rows: readonly ProfileRow[]): Uint8Array {
  const out = new TextWriter();
  out.add('patch,x_m,y_m,z_m,vx_m_s,vy_m_s,vz_m_s\n');
  for (const { patch, place, velocity } of rows)
    out.add(`${patch},${[...place, ...velocity].map(printPlain).join(',')}\n`);
  return out.bytes();
}

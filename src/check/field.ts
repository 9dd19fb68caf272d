import type { Spec } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import type { Recomputed } from './recompute.ts';
import type { Finding, Tally } from './result.ts';

/** Reynolds number above which laminar flow in a tube is no longer sure (general practice: about 2000; from memory). */
export const LAMINAR_LIMIT = 2000;

export interface FieldTallies {
  /** Sees |p − recomputed| over the whole drop, at every node. */
  readonly pressure: Tally;
  /** See the relative difference in every vessel. */
  readonly viscosity: Tally;
  readonly velocity: Tally;
  readonly wallShear: Tally;
  readonly reynolds: Tally;
  /** Sees |t − recomputed| over the longest transit, at every node. */
  readonly transit: Tally;
}

/**
 * Compares a flow solution with the one recomputed: v = Q/(πr²), τ = 4μQ/(πr³), Re = 2ρQ/(πrμ).
 *
 * @returns warnings where the flow is not surely laminar, at most `cap`; Re by density of the spec (without one, by the
 *          file's own column)
 */
export function measureField(
  record: TreeRecord,
  spec: Spec | null,
  recomputed: Recomputed,
  tallies: FieldTallies,
  cap: number,
): Finding[] {
  const { forest, field } = record;
  const { count, parent, radius, flow } = forest;
  const warnings: Finding[] = [];
  let longest = 0;
  for (let i = 0; i < count; i++) if (recomputed.transit[i]! > longest) longest = recomputed.transit[i]!;
  for (let i = 0; i < count; i++) {
    if (field !== null) {
      tallies.pressure.see(Math.abs(field.pressure[i]! - recomputed.pressure[i]!) / recomputed.drop, i);
      tallies.transit.see(Math.abs(field.transit[i]! - recomputed.transit[i]!) / longest, i);
    }
    if (parent[i]! < 0) continue;
    const r = radius[i]!;
    const mu = recomputed.viscosity[i]!;
    const velocity = flow[i]! / (Math.PI * r * r);
    const shear = (4 * mu * velocity) / r;
    if (field !== null) {
      tallies.viscosity.see(relative(field.viscosity[i]!, mu), i);
      tallies.velocity.see(relative(field.velocity[i]!, velocity), i);
      tallies.wallShear.see(relative(field.wallShear[i]!, shear), i);
    }
    let reynolds = field === null ? 0 : field.reynolds[i]!;
    if (spec !== null) {
      reynolds = (2 * spec.blood.density * flow[i]!) / (Math.PI * r * mu);
      if (field !== null) tallies.reynolds.see(relative(field.reynolds[i]!, reynolds), i);
    }
    if (reynolds > LAMINAR_LIMIT && warnings.length < cap) {
      const vessel = tallies.reynolds.head.nameOf(i);
      warnings.push({
        promise: 'laminar',
        vessel,
        other: null,
        row: i,
        value: reynolds,
        limit: LAMINAR_LIMIT,
        unit: '1',
        message: `Reynolds number ${reynolds.toPrecision(4)}: steady laminar flow is not sure above ${LAMINAR_LIMIT}`,
      });
    }
  }
  return warnings;
}

function relative(got: number, wanted: number): number {
  return Math.abs(got - wanted) / Math.abs(wanted);
}

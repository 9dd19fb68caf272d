import type { Reals } from '../core/reals.ts';
import type { FlowField, TreeKind } from '../tree/forest.ts';
import { solveFlow } from './solve.ts';

/** Lengths that resist flow: those of the axes, or those of effective-lengths.ts. */
export const LENGTH_CHOICES = ['axis', 'effective'] as const;
export type LengthChoice = (typeof LENGTH_CHOICES)[number];

/**
 * A solution with other lengths: flows, viscosities and the pressures at roots stay, and with them all but the pressures.
 *
 * @param lengths (n) m, > 0 but at roots
 * Cost: O(n)
 */
export function shortenField(field: FlowField, kinds: readonly TreeKind[], lengths: Reals): FlowField {
  const { forest } = field;
  const rootPressures = kinds.map((_, t) => field.pressure[forest.treeStart[t]!]!);
  const { pressure } = solveFlow(forest, kinds, { rootPressures, viscosity: field.viscosity, density: 1, lengths });
  return { ...field, pressure };
}

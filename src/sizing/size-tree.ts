import { rootOf } from '../physics/junction.ts';
import { leastPowerRadius } from '../physics/murray.ts';
import type { Spec, TreeSpec } from '../spec/types.ts';
import { inletRadiusForMeanDrop, sizeByFlow } from './flow-law.ts';
import { sizePressureMatched } from './pressure-matched.ts';
import type { SizedRows } from './sized-rows.ts';

/** Exponent of the junction law that a spec's sizing obeys; with constant viscosity least power obeys the cube law. */
export function junctionExponent(spec: Spec): number {
  return spec.sizing.rule === 'least-power' ? 3 : spec.sizing.exponent;
}

/** Pa from the root to the terminals that a spec asks for; NaN where it asks for none. */
export function askedDrop(tree: TreeSpec): number {
  const pressure = tree.terminals.pressure;
  return pressure === null ? Number.NaN : Math.abs(tree.inlet.pressure - pressure);
}

/**
 * The first vessel's radius where the spec fixes it whatever the tree looks like.
 *
 * @param terminals number of terminals of mean flow, for a given terminal radius
 * @returns m, or NaN where it depends on the tree's lengths (pressure-matched, mean pressure)
 */
export function fixedInletRadius(spec: Spec, tree: TreeSpec, terminals: number): number {
  const { sizing, blood } = spec;
  if (sizing.rule === 'least-power') return leastPowerRadius(tree.inlet.flow, blood.viscosity.value, blood.maintenance);
  if (sizing.rule === 'pressure-matched' || sizing.scale.by === 'mean-pressure') return Number.NaN;
  if (sizing.scale.by === 'inlet-radius') return sizing.scale.radius;
  const radius = sizing.scale.radius;
  return radius * rootOf(terminals, sizing.exponent);
}

/**
 * Sizes one tree by the spec's rule.
 *
 * @param rows flows set, in m³/s
 * @param out  receives m for every row of the tree
 * @returns m, the first vessel's radius
 * Cost: O(rows)
 */
export function sizeTree(rows: SizedRows, spec: Spec, tree: TreeSpec, terminals: number, out: Float64Array): number {
  const exponent = junctionExponent(spec);
  const viscosity = spec.blood.viscosity.value;
  if (spec.sizing.rule === 'pressure-matched') {
    return sizePressureMatched(rows, askedDrop(tree), exponent, viscosity, out);
  }
  const fixed = fixedInletRadius(spec, tree, terminals);
  const inlet = Number.isNaN(fixed) ? inletRadiusForMeanDrop(rows, askedDrop(tree), exponent, viscosity) : fixed;
  if (spec.sizing.rule === 'least-power') {
    for (let k = 1; k < rows.order.length; k++) {
      const row = rows.order[k]!;
      out[row] = leastPowerRadius(rows.flow[row]!, viscosity, spec.blood.maintenance);
    }
    out[rows.order[0]!] = out[rows.order[1]!]!;
    return inlet;
  }
  sizeByFlow(rows, inlet, exponent, out);
  return inlet;
}

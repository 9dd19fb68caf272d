import { flowWeight, leastPowerCostFactor } from '../physics/murray.ts';
import type { Spec } from '../spec/types.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/**
 * Power per length of every tube at its present radius, 8μQ²/(πr⁴) + mπr²; with least-power radii that is K Q^(2/3).
 *
 * @returns (capacity) W/m
 * Cost: O(rows)
 */
export function tubeWeights(builder: ForestBuilder, spec: Spec): Float64Array {
  const weight = new Float64Array(builder.capacity);
  const viscosity = spec.blood.viscosity.value;
  const { maintenance } = spec.blood;
  const factor = leastPowerCostFactor(viscosity, maintenance);
  for (let row = 0; row < builder.count; row++) {
    if (builder.parent[row]! < 0) continue;
    const tree = builder.tree[row]!;
    const first = builder.child[2 * builder.roots[tree]!]!;
    const flow = (spec.trees[tree]!.inlet.flow * builder.load[row]!) / builder.load[first]!;
    if (spec.sizing.rule === 'least-power') {
      weight[row] = factor * flowWeight(flow);
      continue;
    }
    const radius = builder.radius(row);
    const square = radius * radius;
    weight[row] = (8 * viscosity * flow * flow) / (Math.PI * square * square) + maintenance * Math.PI * square;
  }
  return weight;
}

import { type Memory, ownMemory } from '../core/memory.ts';
import type { PerLength } from '../moves/per-length.ts';
import { rootOf } from '../physics/junction.ts';
import { flowWeight, leastPowerCostFactor } from '../physics/murray.ts';
import type { Spec } from '../spec/types.ts';
import type { ForestBuilder } from '../tree/builder.ts';

/**
 * Power per length of every tube at its present radius, 8μQ²/(πr⁴) + mπr²; with least-power radii that is K Q^(2/3).
 *
 * @param prices (trees) what a watt of pumping counts, see `pumpingPrices`; null: as much as any other
 * @param memory where the result is kept
 * @returns (capacity) W/m
 * Cost: O(rows)
 */
export function tubeWeights(
  builder: ForestBuilder,
  spec: Spec,
  prices: readonly number[] | null = null,
  memory: Memory = ownMemory,
): Float64Array {
  const weight = new Float64Array(memory(8 * builder.capacity));
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
    const price = prices === null ? 1 : prices[tree]!;
    weight[row] = powerPerLength(flow, builder.radius(row), price * viscosity, maintenance);
  }
  return weight;
}

/**
 * What a watt of pumping counts when tubes are shortened, a tree. Where the pressure drop is asked for, pumping is the
 * flow times that drop whatever the tree: a shorter tree is sized narrower instead, and only its blood costs less. To
 * first order that is what a price of M/(2P) says, M the power that keeping blood costs, P pumping: with all radii scaled
 * by s, M s² + price · P / s⁴ is then least at s = 1. Elsewhere the price is 1.
 */
export function pumpingPrices(builder: ForestBuilder, spec: Spec): number[] {
  const { sizing } = spec;
  const asked = sizing.rule === 'pressure-matched' || ('scale' in sizing && sizing.scale.by === 'mean-pressure');
  if (!asked) return spec.trees.map(() => 1);
  const all = new Float64Array(spec.trees.length);
  const blood = new Float64Array(spec.trees.length);
  const weight = tubeWeights(builder, spec);
  const p = builder.position;
  for (let row = 0; row < builder.count; row++) {
    const parent = builder.parent[row]!;
    if (parent < 0) continue;
    const dx = p[3 * row]! - p[3 * parent]!;
    const dy = p[3 * row + 1]! - p[3 * parent + 1]!;
    const dz = p[3 * row + 2]! - p[3 * parent + 2]!;
    const length = Math.sqrt(dx * dx + dy * dy + dz * dz);
    const radius = builder.radius(row);
    const tree = builder.tree[row]!;
    all[tree]! += weight[row]! * length;
    blood[tree]! += spec.blood.maintenance * Math.PI * radius * radius * length;
  }
  return spec.trees.map((_, t) => blood[t]! / (2 * (all[t]! - blood[t]!)));
}

/**
 * Power per length (W/m) as a function of load, for moves that change flows. Exact where a tube's radius follows from
 * its flow alone; where it follows from the whole tree (`pressure-matched`) radii are taken as if it did, and who uses it
 * must look at the true cost afterwards.
 *
 * @param wholes (trees) load that the whole flow of a tree stands for
 * @param prices as for `tubeWeights`
 */
export function powerOfLoad(
  builder: ForestBuilder,
  spec: Spec,
  wholes: readonly number[] = wholeLoads(builder),
  prices: readonly number[] | null = null,
): PerLength {
  const viscosity = spec.blood.viscosity.value;
  const { maintenance } = spec.blood;
  const { exponent } = builder;
  const flows = spec.trees.map((tree) => tree.inlet.flow);
  if (spec.sizing.rule === 'least-power') {
    const factor = leastPowerCostFactor(viscosity, maintenance);
    const scale = flows.map((flow, t) => factor * flowWeight(flow / wholes[t]!));
    return (load, tree) => scale[tree]! * flowWeight(load);
  }
  const thick = flows.map((_, t) => viscosity * (prices === null ? 1 : prices[t]!));
  const first = builder.inletRadius.map((radius, t) => powerPerLength(flows[t]!, radius, thick[t]!, maintenance));
  if (exponent === 3) return (load, tree) => first[tree]! * flowWeight(load / wholes[tree]!);
  return (load, tree) => {
    const part = load / wholes[tree]!;
    const radius = builder.inletRadius[tree]! * rootOf(part, exponent);
    return powerPerLength(flows[tree]! * part, radius, thick[tree]!, maintenance);
  };
}

/** (trees) load of each first vessel. */
export function wholeLoads(builder: ForestBuilder): number[] {
  return builder.roots.map((root) => builder.load[builder.child[2 * root]!] ?? 0);
}

/** W; Σ w L over all tubes. */
export function costOf(builder: ForestBuilder, weight: Float64Array): number {
  let sum = 0;
  const p = builder.position;
  for (let row = 0; row < builder.count; row++) {
    const parent = builder.parent[row]!;
    if (parent < 0) continue;
    const dx = p[3 * row]! - p[3 * parent]!;
    const dy = p[3 * row + 1]! - p[3 * parent + 1]!;
    const dz = p[3 * row + 2]! - p[3 * parent + 2]!;
    sum += weight[row]! * Math.sqrt(dx * dx + dy * dy + dz * dz);
  }
  return sum;
}

function powerPerLength(flow: number, radius: number, viscosity: number, maintenance: number): number {
  const square = radius * radius;
  return (8 * viscosity * flow * flow) / (Math.PI * square * square) + maintenance * Math.PI * square;
}

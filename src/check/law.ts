import type { Spec } from '../spec/types.ts';
import type { Forest } from '../tree/forest.ts';
import type { Recomputed } from './recompute.ts';
import type { Tally } from './result.ts';
import type { ChildLists } from './rows.ts';

/** Exponent γ of r₀^γ = Σ rᵢ^γ that a spec asks for; least power with constant viscosity means 3. */
export function askedExponent(spec: Spec): number {
  return spec.sizing.rule === 'least-power' ? 3 : spec.sizing.exponent;
}

/**
 * Relative residual of r₀^γ = Σ rᵢ^γ at every node that has a tube on both sides; at a bend both radii must be the same.
 *
 * @param tally sees |1 − Σ (rᵢ/r₀)^γ|, named by the vessel that ends at the node
 */
export function measureJunctionLaw(forest: Forest, children: ChildLists, exponent: number, tally: Tally): void {
  const { count, parent, radius } = forest;
  for (let i = 0; i < count; i++) {
    if (parent[i]! < 0 || children.count[i] === 0) continue;
    let sum = 0;
    for (let c = children.first[i]!; c >= 0; c = children.next[c]!) {
      sum += Math.exp(exponent * Math.log(radius[c]! / radius[i]!));
    }
    tally.see(Math.abs(1 - sum), i);
  }
}

/** The sizing rule in words, for the promise's title. */
export function describeSizing(spec: Spec): string {
  const { sizing } = spec;
  if (sizing.rule === 'least-power') return 'radii follow r⁶ = 16μQ²/(π²m)';
  if (sizing.rule === 'pressure-matched') return 'every terminal has the asked pressure';
  const scale = {
    'terminal-radius': 'the asked terminal radius',
    'inlet-radius': 'the asked inlet radius',
    'mean-pressure': 'the asked mean terminal pressure',
  }[sizing.scale.by];
  return `r^γ follows the flow, scaled to ${scale}`;
}

/**
 * Residual of the sizing rule in every vessel.
 *
 * `least-power`: |r⁶π²m/(16μQ²) − 1|. `junction-exponent`: |r^γ/(kQ) − 1|, k from the asked inlet radius, from the asked
 * terminal radius at the tree's mean terminal flow, or, where a mean pressure is asked, from the first vessel; the mean
 * pressure is then compared too. `pressure-matched` has no rule of a single vessel: see `measureTerminalPressure`.
 */
export function measureSizing(
  forest: Forest,
  children: ChildLists,
  spec: Spec,
  recomputed: Recomputed,
  tally: Tally,
): void {
  const { sizing, blood } = spec;
  const { count, parent, radius, flow, tree, treeStart } = forest;
  if (sizing.rule === 'pressure-matched') return;
  if (sizing.rule === 'least-power') {
    const known = (Math.PI * Math.PI * blood.maintenance) / (16 * blood.viscosity.value);
    for (let i = 0; i < count; i++) {
      if (parent[i]! < 0) continue;
      const cube = radius[i]! * radius[i]! * radius[i]!;
      const ratio = cube / flow[i]!;
      tally.see(Math.abs(known * ratio * ratio - 1), i);
    }
    return;
  }
  const gamma = sizing.exponent;
  const power = (r: number) => Math.exp(gamma * Math.log(r));
  for (let t = 0; t + 1 < treeStart.length; t++) {
    const root = treeStart[t]!;
    const end = treeStart[t + 1]!;
    let perFlow = power(radius[root + 1]!) / flow[root + 1]!;
    if (sizing.scale.by === 'inlet-radius') perFlow = power(sizing.scale.radius) / flow[root + 1]!;
    if (sizing.scale.by === 'terminal-radius') {
      let terminals = 0;
      for (let i = root + 1; i < end; i++) if (children.count[i] === 0) terminals++;
      perFlow = (power(sizing.scale.radius) * terminals) / flow[root + 1]!;
    }
    for (let i = root + 1; i < end; i++) tally.see(Math.abs(power(radius[i]!) / (perFlow * flow[i]!) - 1), i);
    const asked = spec.trees[tree[root]!]?.terminals.pressure ?? null;
    if (sizing.scale.by === 'mean-pressure' && asked !== null) {
      const got = recomputed.meanTerminalPressure[t]!;
      const whole = Math.max(Math.abs(asked), recomputed.drop);
      tally.see(Math.abs(got - asked) / whole, root + 1);
    }
  }
}

/**
 * Pressure at every terminal, recomputed, against the asked one.
 *
 * @param tally sees |p − asked| / |asked|, or over the whole drop where 0 Pa is asked
 */
export function measureTerminalPressure(
  forest: Forest,
  children: ChildLists,
  spec: Spec,
  recomputed: Recomputed,
  tally: Tally,
): void {
  const { count, parent, tree } = forest;
  for (let i = 0; i < count; i++) {
    if (parent[i]! < 0 || children.count[i]! > 0) continue;
    const asked = spec.trees[tree[i]!]?.terminals.pressure ?? null;
    if (asked === null) continue;
    tally.see(Math.abs(recomputed.pressure[i]! - asked) / (asked === 0 ? recomputed.drop : Math.abs(asked)), i);
  }
}

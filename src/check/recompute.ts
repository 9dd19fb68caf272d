import type { Spec } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import { ExactSum } from './sums.ts';

/** What steady flow in straight tubes gives, worked out from lengths, radii and flows alone. */
export interface Recomputed {
  /** (n) Pa·s */
  readonly viscosity: ArrayLike<number>;
  /** (n) Pa at the nodes; roots as asked by the spec, else as the file says. */
  readonly pressure: Float64Array;
  /** (n) s from the root to the node, or from the node to the root. */
  readonly transit: Float64Array;
  /** Pa; greatest difference between a root and a node of its tree. */
  readonly drop: number;
  /** (trees) Pa; flow-weighted mean over each tree's terminals. */
  readonly meanTerminalPressure: readonly number[];
  /** W; Σ R Q². */
  readonly pumping: number;
  /** m³; Σ π r² L. */
  readonly volume: number;
}

/**
 * Solves the tree again: R = 8μL/(πr⁴), p falls along the blood's way by RQ, t grows by πr²L/Q.
 *
 * @returns null where neither spec nor file says the viscosity and the root's pressure
 * Source: Hagen–Poiseuille law, any fluid-mechanics text.
 */
export function recomputeFlow(record: TreeRecord, spec: Spec | null, length: Float64Array): Recomputed | null {
  const { forest, field, kinds } = record;
  const { count, parent, radius, flow, tree, treeStart } = forest;
  if (spec === null && field === null) return null;
  const viscosity = spec === null ? field!.viscosity : new Float64Array(count).fill(spec.blood.viscosity.value);
  const pressure = new Float64Array(count);
  const transit = new Float64Array(count);
  const pumping = new ExactSum();
  const volume = new ExactSum();
  const leaf = new Uint8Array(count).fill(1);
  let drop = 0;
  for (let i = 0; i < count; i++) {
    const p = parent[i]!;
    if (p < 0) {
      pressure[i] = spec?.trees[tree[i]!]?.inlet.pressure ?? field?.pressure[i] ?? Number.NaN;
      continue;
    }
    leaf[p] = 0;
    const square = radius[i]! * radius[i]!;
    const section = Math.PI * square;
    const resistance = (8 * viscosity[i]! * length[i]!) / (section * square);
    const fall = resistance * flow[i]!;
    pressure[i] = kinds[tree[i]!] === 'drain' ? pressure[p]! + fall : pressure[p]! - fall;
    transit[i] = transit[p]! + (section * length[i]!) / flow[i]!;
    pumping.add(fall * flow[i]!);
    volume.add(section * length[i]!);
    const below = Math.abs(pressure[i]! - pressure[treeStart[tree[i]!]!]!);
    if (below > drop) drop = below;
  }
  const meanTerminalPressure: number[] = [];
  for (let t = 0; t + 1 < treeStart.length; t++) {
    const weighted = new ExactSum();
    const weight = new ExactSum();
    for (let i = treeStart[t]! + 1; i < treeStart[t + 1]!; i++) {
      if (leaf[i] === 0) continue;
      weighted.add(flow[i]! * pressure[i]!);
      weight.add(flow[i]!);
    }
    meanTerminalPressure.push(weighted.total / weight.total);
  }
  return {
    viscosity,
    pressure,
    transit,
    drop,
    meanTerminalPressure,
    pumping: pumping.total,
    volume: volume.total,
  };
}

import { measureTerritories } from '../tissue/territories.ts';
import type { Tissue } from '../tissue/tissue.ts';
import type { ForestBuilder } from '../tree/builder.ts';
import type { Demand } from './demand.ts';

/**
 * Gives each terminal of a tree its share by the demand of its territory, over the mean so that a fresh site's share of 1
 * is the usual one, and sums loads and weights anew from the terminals. Does nothing where shares are asked otherwise, or
 * the terminals are those of the last time.
 *
 * Weights are set to loads: rules under which they differ size the tree afterwards.
 *
 * @param siteOf site of a terminal's row in the demand
 * @returns      true if shares were set anew
 * Cost: as `measureTerritories`.
 */
export function shareByTerritory(
  builder: ForestBuilder,
  t: number,
  tissue: Tissue,
  demand: Demand,
  siteOf: (row: number) => number,
): boolean {
  if (!demand.byTerritory || demand.served === 0) return false;
  const order = builder.preorder(t);
  const rows = order.filter((row) => builder.childCount(row) === 0);
  const sites = rows.map(siteOf);
  if (!demand.isNewService(sites)) return false;
  const points = new Float64Array(3 * rows.length);
  rows.forEach((row, i) => {
    for (let k = 0; k < 3; k++) points[3 * i + k] = builder.position[3 * row + k]!;
  });
  const territory = measureTerritories(tissue, points);
  let sum = 0;
  for (let i = 0; i < territory.length; i++) sum += territory[i]!;
  demand.setTerritories(sites, territory, sum / rows.length);
  const { load, weight, parent } = builder;
  for (let k = 1; k < order.length; k++) load[order[k]!] = 0;
  rows.forEach((row, i) => {
    load[row] = demand.siteShare(sites[i]!);
  });
  for (let k = order.length - 1; k > 0; k--) {
    const row = order[k]!;
    weight[row] = load[row]!;
    const above = parent[row]!;
    if (parent[above]! >= 0) load[above]! += load[row]!;
  }
  return true;
}

import { pumpingPower } from '../physics/poiseuille.ts';
import type { Forest } from '../tree/forest.ts';
import { tubeLength } from '../tree/vessels.ts';
import { type Viscosity, viscosityColumn } from './viscosity.ts';

/** What a forest costs to run. */
export interface Power {
  /** W, Σ R Q². */
  readonly pumping: number;
  /** W, maintenance × volume. */
  readonly maintenance: number;
  /** W */
  readonly total: number;
  /** m³ of all tubes taken as plain cylinders; where they meet at a node their overlap counts twice. */
  readonly volume: number;
}

/**
 * Measures pumping and blood-keeping power of a forest from geometry and flow.
 *
 * @param viscosity   Pa·s
 * @param maintenance W/m³, ≥ 0
 * Cost: O(n)
 */
export function measurePower(forest: Forest, viscosity: Viscosity, maintenance: number): Power {
  const mu = viscosityColumn(forest, viscosity);
  let pumping = 0;
  let volume = 0;
  for (let i = 0; i < forest.count; i++) {
    if (forest.parent[i]! < 0) continue;
    const length = tubeLength(forest, i);
    const r = forest.radius[i]!;
    pumping += pumpingPower(forest.flow[i]!, length, r, mu[i]!);
    volume += Math.PI * r * r * length;
  }
  return { pumping, maintenance: maintenance * volume, total: pumping + maintenance * volume, volume };
}

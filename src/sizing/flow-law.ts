import { rootOf } from '../physics/junction.ts';
import { rowLength, type SizedRows } from './sized-rows.ts';

/**
 * Radii that follow each tube's own flow, r = R (Q/Q₀)^(1/γ), with R the first vessel's: then r₀^γ = Σ rᵢ^γ wherever
 * flow is conserved.
 *
 * @param inletRadius m, R
 * @param out         receives m for every row of the tree; the root repeats its child's
 * Cost: O(rows).
 */
export function sizeByFlow(rows: SizedRows, inletRadius: number, exponent: number, out: Float64Array): void {
  const { order, flow } = rows;
  const whole = flow[order[1]!]!;
  out[order[0]!] = inletRadius;
  for (let k = 1; k < order.length; k++) {
    const row = order[k]!;
    out[row] = inletRadius * rootOf(flow[row]! / whole, exponent);
  }
}

/**
 * The first vessel's radius at which radii by flow give the asked flow-weighted mean pressure at the terminals.
 *
 * The flow-weighted mean drop is Σ R Q² / Q₀ over all tubes (each tube's drop counts for the flow through it), and with
 * r = R (Q/Q₀)^(1/γ) it is 8μ/(π Q₀ R⁴) · Σ Q² L (Q/Q₀)^(−4/γ).
 *
 * @param drop Pa, root pressure less the asked mean, > 0
 * @returns m
 * Source: Poiseuille's law and conservation of flow, derived here.
 * Cost:   O(rows).
 */
export function inletRadiusForMeanDrop(rows: SizedRows, drop: number, exponent: number, viscosity: number): number {
  const { order, flow } = rows;
  const whole = flow[order[1]!]!;
  let sum = 0;
  for (let k = 1; k < order.length; k++) {
    const row = order[k]!;
    const root = rootOf(flow[row]! / whole, exponent);
    const square = root * root;
    const q = flow[row]!;
    sum += (q * q * rowLength(rows, row)) / (square * square);
  }
  return rootOf((8 * viscosity * sum) / (Math.PI * whole * drop), 4);
}

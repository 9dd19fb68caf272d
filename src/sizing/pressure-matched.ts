import { powerOf, rootOf } from '../physics/junction.ts';
import { rowLength, type SizedRows } from './sized-rows.ts';

/**
 * Radii with which every terminal of a tree sits at one pressure for its flow, and every junction obeys
 * r₀^γ = Σ rᵢ^γ.
 *
 * Notation: R*ᵢ reduced resistance of the subtree that starts with tube i, R·r⁴ of the whole of it (Pa·s·m); βᵢ
 * radius of a child over its parent's. From the terminals: R* = (8μ/π) L + [Σ βᵢ⁴/R*ᵢ]⁻¹ with
 * βᵢ = xᵢ / (Σ xⱼ^γ)^(1/γ), xᵢ = (Qᵢ R*ᵢ)^(1/4), which gives all children the same drop. From the root:
 * r = (R* Q / ΔP)^(1/4), then rᵢ = βᵢ r.
 *
 * @param drop     Pa from the root to every terminal, > 0
 * @param exponent γ, > 0
 * @param viscosity Pa·s
 * @param out      receives m for every row of the tree; the root repeats its child's
 * @returns m, the first vessel's radius
 * Source: constrained constructive optimisation, Schreiner & Buxbaum (1993), IEEE Trans Biomed Eng 40:482 and Karch et
 *         al. (1999), Comput Biol Med 29:19, here for any number of children; from memory, checked numerically.
 * Cost:   O(rows), two sweeps.
 */
export function sizePressureMatched(
  rows: SizedRows,
  drop: number,
  exponent: number,
  viscosity: number,
  out: Float64Array,
): number {
  const { order, parent, flow } = rows;
  const n = order.length;
  const rowCount = parent.length;
  // Σ xⱼ^γ over the children of a row, then Σ xᵢ⁴/R*ᵢ.
  const law = new Float64Array(rowCount);
  const conductance = new Float64Array(rowCount);
  const x = new Float64Array(rowCount);
  const unit = (8 * viscosity) / Math.PI;
  let whole = 0;
  for (let k = n - 1; k >= 0; k--) {
    const row = order[k]!;
    let below = 0;
    if (law[row]! > 0) {
      const scale = rootOf(law[row]!, exponent);
      const square = scale * scale;
      below = (square * square) / conductance[row]!;
    }
    const above = parent[row]!;
    if (above < 0) {
      whole = below;
      break;
    }
    const reduced = unit * rowLength(rows, row) + below;
    const share = rootOf(flow[row]! * reduced, 4);
    x[row] = share;
    law[above]! += powerOf(share, exponent);
    const square = share * share;
    conductance[above]! += (square * square) / reduced;
  }
  const root = order[0]!;
  const first = rootOf((whole * flow[order[1]!]!) / drop, 4);
  out[root] = first;
  for (let k = 1; k < n; k++) {
    const row = order[k]!;
    const above = parent[row]!;
    out[row] = (out[above]! * x[row]!) / rootOf(law[above]!, exponent);
  }
  return first;
}

import type { Forest } from '../../src/tree/forest.ts';

/**
 * Pressures of a forest with given end pressures, the slow and obvious way: Kirchhoff's matrix of all nodes and
 * Gaussian elimination with pivoting. The twin of every clever flow solve; good for a few hundred rows and radii
 * over a decade: in floating point a thick tube's conductance drowns those of tubes a thousand times thinner.
 *
 * @param resistance (n) Pa·s/m³ of the tube that ends at a row
 * @param fixed      (n) Pa at ends, NaN at nodes to be solved
 * @returns          (n) Pa
 */
export function densePressures(forest: Forest, resistance: ArrayLike<number>, fixed: ArrayLike<number>): Float64Array {
  const n = forest.count;
  const rows = Array.from({ length: n }, () => new Float64Array(n + 1));
  for (let i = 0; i < n; i++) {
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    const g = 1 / resistance[i]!;
    for (const [a, b] of [
      [i, parent],
      [parent, i],
    ] as const) {
      rows[a]![a]! += g;
      rows[a]![b]! -= g;
    }
  }
  for (let i = 0; i < n; i++) {
    if (Number.isNaN(fixed[i]!)) {
      // Scale each balance, or the pivots of thin tubes drown in those of thick ones.
      const scale = rows[i]![i]!;
      for (let k = 0; k < n; k++) rows[i]![k]! /= scale;
      continue;
    }
    rows[i]!.fill(0);
    rows[i]![i] = 1;
    rows[i]![n] = fixed[i]!;
  }
  for (let k = 0; k < n; k++) {
    let pivot = k;
    for (let i = k + 1; i < n; i++) if (Math.abs(rows[i]![k]!) > Math.abs(rows[pivot]![k]!)) pivot = i;
    [rows[k], rows[pivot]] = [rows[pivot]!, rows[k]!];
    for (let i = k + 1; i < n; i++) {
      const factor = rows[i]![k]! / rows[k]![k]!;
      if (factor !== 0) for (let j = k; j <= n; j++) rows[i]![j]! -= factor * rows[k]![j]!;
    }
  }
  const x = new Float64Array(n);
  for (let k = n - 1; k >= 0; k--) {
    let sum = rows[k]![n]!;
    for (let j = k + 1; j < n; j++) sum -= rows[k]![j]! * x[j]!;
    x[k] = sum / rows[k]![k]!;
  }
  return x;
}

import { InvariantError } from '../core/errors.ts';
import type { Reals } from '../core/reals.ts';
import type { Forest } from '../tree/forest.ts';

/** Viscosity in Pa·s: the same everywhere, one a row, or computed for a row. A root's value is not looked at. */
export type Viscosity = number | Reals | ((row: number) => number);

/**
 * Writes viscosity out, one value a row; a root repeats its child's.
 *
 * @returns (n) Pa·s, all > 0
 * @throws InvariantError where a column has another length or a value is not positive
 */
export function viscosityColumn(forest: Forest, viscosity: Viscosity): Float64Array {
  const n = forest.count;
  const column = new Float64Array(n);
  if (typeof viscosity === 'number') column.fill(viscosity);
  else if (typeof viscosity === 'function') for (let i = 0; i < n; i++) column[i] = viscosity(i);
  else {
    if (viscosity.length !== n) {
      throw new InvariantError(`viscosityColumn: got ${viscosity.length} values for ${n} rows`);
    }
    for (let i = 0; i < n; i++) column[i] = viscosity[i]!;
  }
  for (let i = 0; i < n; i++) {
    // The only child of a root is the row after it.
    if (forest.parent[i]! < 0) column[i] = column[i + 1]!;
    else if (!(column[i]! > 0))
      throw new InvariantError(`viscosityColumn: row ${i} has ${column[i]} Pa·s, expected > 0`);
  }
  // Roots were read from the column before the child was checked, but a child that fails has thrown by now.
  return column;
}

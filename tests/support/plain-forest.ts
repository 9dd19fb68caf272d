import { type ForestBuilder, FREED } from '../../src/tree/builder.ts';

/**
 * The plain twin of all that moves keep up to date: a forest as it follows from who hangs on whom, where nodes are and
 * what the terminals draw, each thing computed anew from nothing else.
 */
export interface PlainForest {
  /** Rows of tubes, ascending. */
  readonly rows: number[];
  /** (rows of the builder) sums over the terminals at and below. */
  readonly load: Float64Array;
  readonly weight: Float64Array;
  /** m; inlet radius · (weight / weight of the tree's first tube)^(1/γ). */
  readonly radius: Float64Array;
  readonly length: Float64Array;
}

export function plainForest(builder: ForestBuilder): PlainForest {
  const { parent, child, position: p, exponent } = builder;
  const n = builder.count;
  const rows: number[] = [];
  const load = new Float64Array(n);
  const weight = new Float64Array(n);
  const radius = new Float64Array(n);
  const length = new Float64Array(n);
  for (let row = 0; row < n; row++) {
    const above = parent[row]!;
    if (above < 0) continue;
    rows.push(row);
    length[row] = Math.hypot(
      p[3 * row]! - p[3 * above]!,
      p[3 * row + 1]! - p[3 * above + 1]!,
      p[3 * row + 2]! - p[3 * above + 2]!,
    );
    if (child[2 * row]! >= 0) continue;
    for (let at = row; at >= 0; at = parent[at]!) {
      load[at]! += builder.load[row]!;
      weight[at]! += builder.weight[row]!;
    }
  }
  for (const row of rows) {
    const tree = builder.tree[row]!;
    const whole = weight[builder.roots[tree]!]!;
    radius[row] = builder.inletRadius[tree]! * Math.exp(Math.log(weight[row]! / whole) / exponent);
  }
  return { rows, load, weight, radius, length };
}

/** Σ f(load) · length over all tubes of all trees. */
export function plainForestCost(builder: ForestBuilder, perLength: (load: number, tree: number) => number): number {
  const { rows, load, length } = plainForest(builder);
  let cost = 0;
  for (const row of rows) cost += perLength(load[row]!, builder.tree[row]!) * length[row]!;
  return cost;
}

/** Numbers of a row in `columnsOf`. */
const COLUMNS = 9;

/** Every column of the rows in use, row by row; rows that are not in use are left blank, those at the end left out. */
export function columnsOf(builder: ForestBuilder): Float64Array {
  const { count, parent, child, tree, position, load, weight } = builder;
  let end = count;
  while (end > 0 && parent[end - 1] === FREED) end--;
  const columns = new Float64Array(COLUMNS * end);
  for (let k = 0; k < end; k++) {
    if (parent[k] === FREED) continue;
    const row = [parent[k]!, child[2 * k]!, child[2 * k + 1]!, tree[k]!, load[k]!, weight[k]!];
    columns.set(row, COLUMNS * k);
    for (let i = 0; i < 3; i++) columns[COLUMNS * k + row.length + i] = position[3 * k + i]!;
  }
  return columns;
}

/** Whether two forests' columns are the same, bit for bit. */
export function sameColumns(a: Float64Array, b: Float64Array): boolean {
  return a.length === b.length && a.every((value, k) => Object.is(value, b[k]));
}

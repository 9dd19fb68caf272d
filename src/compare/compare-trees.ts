import type { TreeRecord } from '../tree/forest.ts';
import { tubeLength, vesselName } from '../tree/vessels.ts';
import type { Difference, FileLimits, QuantitySummary, TreeComparison, TreeCounts } from './comparison.ts';
import { type Match, matchTrees } from './match.ts';
import { QUANTITIES, type Quantity } from './quantities.ts';
import { DEFAULT_TOLERANCE, type Tolerance } from './tolerance.ts';

export interface CompareOptions {
  /** Were the two files the same bytes? Left out where there are no bytes to ask. */
  readonly sameBytes?: boolean | undefined;
  /** Files whose formats cannot hold everything: what they drop is not compared, whatever was supplied for it. */
  readonly files?: readonly FileLimits[] | undefined;
}

/**
 * Compares two trees vessel by vessel: matches them by shape, then measures every quantity. One that only one side has
 * is a difference, unless the other's file cannot hold it.
 *
 * Cost: O(n); 10⁵ vessels take about 0.2 s.
 */
export function compareTrees(
  a: TreeRecord,
  b: TreeRecord,
  tolerance: Tolerance = DEFAULT_TOLERANCE,
  options: CompareOptions = {},
): TreeComparison {
  const match = matchTrees(a, b);
  const notes: string[] = [];
  const quantities: QuantitySummary[] = [];
  let firstValue: (Difference & { rowA: number }) | null = null;
  let firstLack: Difference | null = null;
  for (const quantity of QUANTITIES) {
    const allowed = tolerance[quantity.key] ?? quantity.tolerance;
    const holder = options.files?.find((file) => file.drops.includes(quantity.part));
    const skipped = holder === undefined ? null : `not held by ${holder.name}`;
    const { summary, first } = measureQuantity(a, b, match, quantity, allowed, skipped);
    quantities.push(summary);
    if (skipped !== null) notes.push(`${quantity.title} is not compared: ${skipped}`);
    if (summary.lacking !== null) firstLack ??= describeLack(summary.title, summary.lacking);
    if (first !== null && (firstValue === null || first.rowA < firstValue.rowA)) firstValue = first;
  }
  const firstShape = describeShape(a, b, match);
  a.names.forEach((name, t) => {
    const rowB = match.rowOfA[a.forest.treeStart[t]!]!;
    if (rowB < 0) return;
    const other = b.names[b.forest.tree[rowB]!]!;
    if (other !== name) notes.push(`tree ${t} is called ${name} in A and ${other} in B`);
  });
  const same = options.sameBytes ?? equalRecords(a, b);
  const reason = firstShape !== null ? 'topology' : firstValue !== null || firstLack !== null ? 'values' : null;
  // In one row the shape below it matters less than the vessel itself.
  const first =
    firstShape === null || (firstValue !== null && firstShape.rowA >= 0 && firstValue.rowA <= firstShape.rowA)
      ? firstValue
      : firstShape;
  return {
    level: 'tree',
    verdict: same ? 'identical' : reason === null ? 'equivalent' : 'different',
    identity: options.sameBytes === undefined ? 'values' : 'bytes',
    reason: same ? null : reason,
    first: same ? null : (first ?? firstLack),
    firstShape: same ? null : firstShape,
    countsA: countRows(a),
    countsB: countRows(b),
    matched: a.forest.count - match.unmatchedA - (a.names.length - match.treesOnlyA.length),
    quantities,
    tolerance,
    notes,
  };
}

function nameOf(record: TreeRecord, row: number): string {
  if (row < 0) return '–';
  const { forest, names } = record;
  return forest.parent[row]! < 0 ? `${names[forest.tree[row]!]}:root` : vesselName(forest, names, row);
}

function measureQuantity(
  a: TreeRecord,
  b: TreeRecord,
  match: Match,
  quantity: Quantity,
  allowed: number,
  skipped: string | null,
): { summary: QuantitySummary; first: Difference | null } {
  const { key, title, unit, relative } = quantity;
  const columnA = skipped === null ? quantity.column(a) : null;
  const columnB = skipped === null ? quantity.column(b) : null;
  let compared = 0;
  let exceeded = 0;
  let maxAbsolute = 0;
  let maxRelative = 0;
  let worst = 0;
  let worstRow = -1;
  let firstRow = -1;
  let firstSize = 0;
  if (columnA !== null && columnB !== null) {
    const isPosition = key === 'position_um';
    for (let i = 0; i < a.forest.count; i++) {
      const j = match.rowOfA[i]!;
      if (j < 0 || (quantity.at === 'tube' && a.forest.parent[i]! < 0)) continue;
      compared++;
      let absolute = 0;
      let size = 0;
      if (isPosition) {
        const dx = columnA[3 * i]! - columnB[3 * j]!;
        const dy = columnA[3 * i + 1]! - columnB[3 * j + 1]!;
        const dz = columnA[3 * i + 2]! - columnB[3 * j + 2]!;
        absolute = 1e6 * Math.sqrt(dx * dx + dy * dy + dz * dz);
      } else {
        absolute = Object.is(columnA[i], columnB[j]) ? 0 : Math.abs(columnA[i]! - columnB[j]!);
        size = Math.max(Math.abs(columnA[i]!), Math.abs(columnB[j]!));
      }
      if (Number.isNaN(absolute)) absolute = Infinity;
      const share = absolute === 0 ? 0 : absolute === Infinity ? Infinity : absolute / size;
      if (absolute > maxAbsolute) maxAbsolute = absolute;
      if (share > maxRelative) maxRelative = share;
      const deviation = relative ? share : absolute;
      if (deviation > worst) {
        worst = deviation;
        worstRow = i;
      }
      if (deviation <= allowed) continue;
      exceeded++;
      if (firstRow >= 0) continue;
      firstRow = i;
      firstSize = deviation;
    }
  }
  const neither = columnA === null && columnB === null;
  const lacking = neither || (columnA !== null && columnB !== null) ? null : columnA === null ? 'A' : 'B';
  const summary: QuantitySummary = {
    key,
    title,
    unit,
    relative,
    tolerance: allowed,
    compared,
    lacking,
    skipped: skipped ?? (neither ? 'in neither' : null),
    exceeded,
    maxAbsolute,
    maxRelative: key === 'position_um' ? Number.NaN : maxRelative,
    vesselA: worstRow < 0 ? null : nameOf(a, worstRow),
    vesselB: worstRow < 0 ? null : nameOf(b, match.rowOfA[worstRow]!),
  };
  if (firstRow < 0) return { summary, first: null };
  const rowB = match.rowOfA[firstRow]!;
  const vesselA = nameOf(a, firstRow);
  const vesselB = nameOf(b, rowB);
  const valueA = formatValue(quantity, columnA!, firstRow);
  const valueB = formatValue(quantity, columnB!, rowB);
  const size = `${Number(firstSize.toPrecision(4))}${relative ? ' relative' : unit === '1' ? '' : ` ${unit}`}`;
  const message = `${title} of ${vesselA} is ${valueA}, of ${vesselB} ${valueB}: differs by ${size}, allowed ${allowed}`;
  return { summary, first: { what: title, vesselA, vesselB, rowA: firstRow, rowB, valueA, valueB, message } };
}

function describeLack(title: string, lacking: 'A' | 'B'): Difference {
  const [valueA, valueB] = lacking === 'A' ? ['none', 'there'] : ['there', 'none'];
  const message = `${title} is only in ${lacking === 'A' ? 'B' : 'A'}: ${lacking} has none`;
  return { what: title, vesselA: '–', vesselB: '–', rowA: -1, rowB: -1, valueA, valueB, message };
}

function formatValue(quantity: Quantity, column: ArrayLike<number>, row: number): string {
  if (quantity.key === 'position_um') {
    const place = [0, 1, 2].map((k) => Number((1e6 * column[3 * row + k]!).toPrecision(10)));
    return `(${place.join(', ')}) µm`;
  }
  return quantity.unit === '1' ? `${column[row]}` : `${column[row]} ${quantity.unit}`;
}

/** The first disagreement in shape: kinds of trees, trees without partner, then the first node that branches otherwise. */
function describeShape(a: TreeRecord, b: TreeRecord, match: Match): Difference | null {
  const what = 'topology';
  for (const [t, kind] of a.kinds.entries()) {
    const rowA = a.forest.treeStart[t]!;
    const rowB = match.rowOfA[rowA]!;
    if (rowB < 0) continue;
    const other = b.kinds[b.forest.tree[rowB]!]!;
    if (kind === other) continue;
    const [vesselA, vesselB] = [nameOf(a, rowA), nameOf(b, rowB)];
    const message = `tree ${a.names[t]} is a ${kind} tree in A, a ${other} tree in B`;
    return { what, vesselA, vesselB, rowA, rowB, valueA: kind, valueB: other, message };
  }
  if (match.treesOnlyA.length + match.treesOnlyB.length > 0) {
    const [only, record, side] =
      match.treesOnlyA.length > 0 ? [match.treesOnlyA, a, 'A' as const] : [match.treesOnlyB, b, 'B' as const];
    const row = record.forest.treeStart[only[0]!]!;
    const place = nameOf(record, row);
    return {
      what,
      vesselA: side === 'A' ? place : '–',
      vesselB: side === 'B' ? place : '–',
      rowA: side === 'A' ? row : -1,
      rowB: side === 'B' ? row : -1,
      valueA: `${a.names.length} trees`,
      valueB: `${b.names.length} trees`,
      message: `A has ${a.names.length} trees, B ${b.names.length}: ${record.names[only[0]!]} is only in ${side}`,
    };
  }
  if (match.parting === null) return null;
  const { rowA, rowB, childrenA, childrenB } = match.parting;
  const [vesselA, vesselB] = [nameOf(a, rowA), nameOf(b, rowB)];
  const [valueA, valueB] = [describeEnd(childrenA), describeEnd(childrenB)];
  const message = `${vesselA} ${valueA}, ${vesselB} ${valueB}`;
  return { what, vesselA, vesselB, rowA, rowB, valueA, valueB, message };
}

function describeEnd(children: number): string {
  if (children === 0) return 'ends in a terminal';
  return children === 1 ? 'ends in a bend' : `branches into ${children}`;
}

function countRows(record: TreeRecord): TreeCounts {
  const { forest } = record;
  const { count, parent, radius } = forest;
  const children = new Int32Array(count);
  for (let i = 0; i < count; i++) if (parent[i]! >= 0) children[parent[i]!]!++;
  let vessels = 0;
  let terminals = 0;
  let bends = 0;
  let length = 0;
  let volume = 0;
  for (let i = 0; i < count; i++) {
    if (parent[i]! < 0) continue;
    vessels++;
    if (children[i] === 0) terminals++;
    if (children[i] === 1) bends++;
    const own = tubeLength(forest, i);
    length += own;
    volume += Math.PI * radius[i]! * radius[i]! * own;
  }
  return { trees: record.names.length, vessels, terminals, bends, length_m: length, volume_m3: volume };
}

/** The same in every bit of every column, names, kinds and provenance. */
function equalRecords(a: TreeRecord, b: TreeRecord): boolean {
  const columns = (record: TreeRecord): ArrayLike<number>[] => {
    const { forest, field, order } = record;
    const own = [forest.treeStart, forest.tree, forest.parent, forest.position, forest.radius, forest.flow, order];
    if (field === null) return own as ArrayLike<number>[];
    const { pressure, transit, viscosity, velocity, wallShear, reynolds, haematocrit } = field;
    return [...own, pressure, transit, viscosity, velocity, wallShear, reynolds, haematocrit] as ArrayLike<number>[];
  };
  if (a.provenance !== b.provenance || (a.field === null) !== (b.field === null)) return false;
  if (a.names.join('\n') !== b.names.join('\n') || a.kinds.join() !== b.kinds.join()) return false;
  const [left, right] = [columns(a), columns(b)];
  return left.every((column, k) => {
    const other = right[k]!;
    if (column.length !== other.length) return false;
    for (let i = 0; i < column.length; i++) if (!Object.is(column[i], other[i])) return false;
    return true;
  });
}

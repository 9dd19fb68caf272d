import type { Spec } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import type { Tally } from './result.ts';
import { vesselNamer } from './rows.ts';

/**
 * Looks whether the rows are trees: one root a tree with one child, every row hanging from a row before it in the same
 * tree, each subtree one run of rows, all numbers finite, radii, flows and lengths positive.
 *
 * @param tally takes each fault; its value is a plain count of 1
 * @returns false where the rows are so broken that nothing else can be measured
 */
export function inspectStructure(record: TreeRecord, spec: Spec | null, length: Float64Array, tally: Tally): boolean {
  const { forest, names, kinds } = record;
  const { count, treeStart, tree, parent, position, radius, flow } = forest;
  const nameOf = vesselNamer(record);
  const trees = treeStart.length - 1;
  let sound = true;
  const fault = (row: number, message: string) => tally.fail(nameOf(row), row, 1, 0, message);
  const fatal = (row: number, message: string) => {
    sound = false;
    fault(row, message);
  };
  if (trees < 1 || treeStart[0] !== 0 || treeStart[trees] !== count) {
    tally.fail('forest', -1, 1, 0, 'the first rows of the trees do not span all rows');
    return false;
  }
  if (names.length !== trees || kinds.length !== trees) {
    tally.fail('forest', -1, 1, 0, `${trees} trees, but ${names.length} names and ${kinds.length} kinds`);
  }
  if (spec !== null) {
    if (spec.trees.length !== trees) {
      tally.fail('forest', -1, 1, 0, `${trees} trees, the spec asks for ${spec.trees.length}`);
    }
    for (let t = 0; t < Math.min(trees, spec.trees.length); t++) {
      const asked = spec.trees[t]!;
      if (asked.name !== names[t] || asked.kind !== kinds[t]) {
        tally.fail(
          names[t] ?? String(t),
          -1,
          1,
          0,
          `tree ${t} is ${kinds[t]} "${names[t]}", the spec asks for ${asked.kind} "${asked.name}"`,
        );
      }
    }
  }
  for (let t = 0; t < trees; t++) {
    const from = treeStart[t]!;
    const to = treeStart[t + 1]!;
    if (!(to > from + 1)) {
      tally.fail(
        names[t] ?? String(t),
        -1,
        1,
        0,
        `tree ${t} has ${Math.max(0, to - from - 1)} vessels, expected 1 or more`,
      );
      return false;
    }
    let rootChildren = 0;
    for (let i = from; i < to; i++) {
      tally.checked++;
      const p = parent[i]!;
      if (tree[i] !== t) fatal(i, `row ${i} is said to be of tree ${tree[i]}, but lies in the rows of tree ${t}`);
      if (i === from) {
        if (p !== -1) fatal(i, `row ${i} starts tree ${t} but has parent ${p}`);
        continue;
      }
      if (!(p >= from && p < i)) {
        fatal(i, `row ${i} hangs from row ${p}, expected a row of its tree before it`);
        continue;
      }
      if (p === from) rootChildren++;
      // Preorder: the parent is the row before or one of that row's ancestors. Rows above are sound, so the walk ends.
      if (sound) {
        let ancestor = i - 1;
        while (ancestor > p) ancestor = parent[ancestor]!;
        if (ancestor !== p) fault(i, `row ${i} hangs from row ${p}, whose subtree ended before row ${i - 1}`);
      }
    }
    if (rootChildren !== 1) fault(from, `the root of tree ${t} has ${rootChildren} vessels, expected 1`);
  }
  if (!sound) return false;
  for (let i = 0; i < count; i++) {
    for (let k = 0; k < 3; k++) {
      if (!Number.isFinite(position[3 * i + k]!)) fatal(i, `coordinate ${'xyz'[k]} is ${position[3 * i + k]}`);
    }
    if (!(radius[i]! > 0 && radius[i]! < Infinity)) fatal(i, `radius is ${radius[i]} m, expected > 0`);
    if (!(flow[i]! > 0 && flow[i]! < Infinity)) fatal(i, `flow is ${flow[i]} m³/s, expected > 0`);
    if (parent[i]! >= 0 && length[i] === 0) fault(i, 'length is 0 m');
  }
  for (let t = 0; t < trees; t++) {
    const root = treeStart[t]!;
    if (radius[root] !== radius[root + 1] || flow[root] !== flow[root + 1]) {
      fault(root, `the root of tree ${t} does not repeat its vessel's radius and flow`);
    }
  }
  return sound;
}

/**
 * Strahler orders worked out again: a row keeps the two highest orders among its children; equal ones raise it.
 *
 * @param tally sees, per vessel, how far the order given is off
 * Source: Strahler A N (1952), Bull Geol Soc Am 63:1117; from memory.
 */
export function measureOrders(record: TreeRecord, tally: Tally): void {
  const { count, parent } = record.forest;
  const first = new Int32Array(count);
  const second = new Int32Array(count);
  const own = new Int32Array(count);
  for (let i = count - 1; i >= 0; i--) {
    own[i] = first[i] === 0 ? 1 : first[i] === second[i] ? first[i]! + 1 : first[i]!;
    const p = parent[i]!;
    if (p < 0) continue;
    if (own[i]! > first[p]!) {
      second[p] = first[p]!;
      first[p] = own[i]!;
    } else if (own[i]! > second[p]!) second[p] = own[i]!;
  }
  for (let i = 0; i < count; i++) {
    if (parent[i]! >= 0) tally.see(Math.abs(record.order[i]! - own[i]!), i);
  }
}

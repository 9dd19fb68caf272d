import type { Tally } from '../result.ts';
import type { BoundaryTable } from './boundary.ts';
import type { NetworkTable } from './network.ts';

/** What a patch name says: `inlet_<tree>`, `outlet_tree_<tree>`, `outlet_<vessel>`, `inlet_vessel_<vessel>`. */
const NAME = /^(inlet|outlet)_(tree_|vessel_)?(\d+)$/;

interface NameFacts {
  readonly type: string;
  /** Whether the cap is at a tree's root; the number is then the tree's, else the vessel's. */
  readonly root: boolean;
  readonly number: string;
}

function readName(name: string): NameFacts | null {
  const [, type, of, number] = NAME.exec(name) ?? [];
  if (type === undefined || number === undefined) return null;
  if (of === (type === 'inlet' ? 'tree_' : 'vessel_')) return null;
  return { type, root: (type === 'inlet') === (of === undefined), number };
}

/**
 * Looks whether type, tree and vessel of every row are those of the patch's name, and whether the vessel ends there.
 *
 * Cost: O(rows + segments)
 */
export function lookAtBoundaryNames(table: BoundaryTable, network: NetworkTable | null, tally: Tally): void {
  const segment = new Map(network?.name.map((name, k) => [name, k]));
  for (let row = 0; row < table.count; row++) {
    const name = table.name[row]!;
    const fail = (message: string) => tally.fail(name, row, 1, 0, message);
    tally.checked++;
    const facts = readName(name);
    if (facts === null) {
      fail('the name says neither a tree nor a vessel');
      continue;
    }
    if (facts.type !== table.type[row]) fail(`the patch is an ${facts.type} by its name, type is ${table.type[row]}`);
    const column = facts.root ? 'tree' : 'vessel';
    const got = table[column][row]!;
    if (got !== facts.number) fail(`${column}: got "${got}", expected ${facts.number} as in the patch's name`);
    if (!/^\d+$/.test(table.tree[row]!)) fail(`tree: got "${table.tree[row]}", expected a whole number`);
    if (network === null) continue;
    const k = segment.get(table.vessel[row]!);
    if (k === undefined) {
      fail(`vessel: got "${table.vessel[row]}", which is no segment of network.csv`);
      continue;
    }
    let least = Infinity;
    for (const end of [2 * k, 2 * k + 1]) {
      const off = [0, 1, 2].map((axis) => network.end[3 * end + axis]! - table.centre[3 * row + axis]!);
      least = Math.min(least, Math.hypot(...off));
    }
    if (!(least <= 0.05 * table.radius[row]!)) fail(`vessel: segment ${table.vessel[row]} does not end at the cap`);
  }
}

/**
 * Looks whether resistances stand where they must: none at a tree's root, more than 0 where something was cut off
 * behind the cap, 0 at the other ends.
 *
 * @param cut names of the patches behind which something was cut off, null where the folder does not say
 */
export function lookAtResistances(table: BoundaryTable, cut: readonly string[] | null, tally: Tally): void {
  const behind = new Set(cut);
  for (let row = 0; row < table.count; row++) {
    const name = table.name[row]!;
    const text = table.resistance[row]!;
    const fail = (wanted: string) => {
      tally.fail(name, row, 1, 0, `resistance_Pa_s_m3: got "${text}", expected ${wanted}`);
    };
    tally.checked++;
    const value = text === '' ? Number.NaN : Number(text);
    const facts = readName(name);
    if (facts === null ? text === '' : facts.root) {
      if (text !== '') fail("nothing at a tree's root");
    } else if (!(value >= 0 && value < Infinity)) fail('0 or more');
    else if (cut !== null && behind.has(name) && value === 0) fail('more than 0: something was cut off behind the cap');
    else if (cut !== null && !behind.has(name) && value !== 0) fail('0: nothing was cut off behind the cap');
  }
  for (const name of behind) {
    if (!table.name.includes(name)) tally.fail(name, -1, 1, 0, 'cut_off of mesh.json names a patch that is no cap');
  }
}

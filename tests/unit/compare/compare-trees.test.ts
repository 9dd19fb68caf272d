import { describe, expect, test } from 'vitest';
import { compareTrees } from '../../../src/compare/compare-trees.ts';
import { compareJson } from '../../../src/compare/json.ts';
import { compareJUnit } from '../../../src/compare/junit.ts';
import { compareTable } from '../../../src/compare/table.ts';
import { DEFAULT_TOLERANCE } from '../../../src/compare/tolerance.ts';
import type { TreeRecord } from '../../../src/tree/forest.ts';
import { type LooseTree, looseTree, recordOf, shuffled } from '../../support/compare-forests.ts';

const TREE = looseTree('1', 60);
const RECORD = recordOf(TREE);

function changed(change: (tree: LooseTree) => void): TreeRecord {
  const copy = structuredClone(TREE);
  change(copy);
  return recordOf(copy);
}

/** Frozen row of a loose row, by its place. */
function rowAt(record: TreeRecord, place: readonly number[]): number {
  for (let i = 0; i < record.forest.count; i++) {
    if (place.every((x, k) => record.forest.position[3 * i + k] === x)) return i;
  }
  throw new Error('no such row');
}

describe('the same tree', () => {
  test('identical, by its columns or by its bytes', () => {
    const result = compareTrees(RECORD, recordOf(TREE));
    expect(result.verdict).toBe('identical');
    expect(result.reason).toBe(null);
    expect(result.first).toBe(null);
    expect(result.matched).toBe(RECORD.forest.count - 1);
    expect(compareTrees(RECORD, RECORD, DEFAULT_TOLERANCE, { sameBytes: true }).verdict).toBe('identical');
  });

  test('equivalent where the bytes are said to differ', () => {
    expect(compareTrees(RECORD, RECORD, DEFAULT_TOLERANCE, { sameBytes: false }).verdict).toBe('equivalent');
  });

  test.each(['1', '2', '3', '4', '5'])('equivalent after renumbering, seed %s', (seed) => {
    const other = recordOf(shuffled(TREE, seed));
    expect([...other.forest.position]).not.toEqual([...RECORD.forest.position]);
    const result = compareTrees(RECORD, other);
    expect(result.verdict).toBe('equivalent');
    // Flows were summed in another order; everything else is the same bits.
    expect(result.quantities[0]!.maxAbsolute).toBe(0);
    for (const summary of result.quantities.slice(1)) expect(summary.maxRelative).toBeLessThan(1e-14);
  });

  test('identical but for one bit is equivalent', () => {
    const other = changed((tree) => (tree.radius[9]! *= 1 + Number.EPSILON));
    expect(compareTrees(RECORD, other).verdict).toBe('equivalent');
  });
});

describe('values', () => {
  test('a shift below the tolerance, and above it', () => {
    const shift = (by: number) => changed((tree) => (tree.position[40]![0] += by));
    expect(compareTrees(RECORD, shift(0.9e-9)).verdict).toBe('equivalent');
    const result = compareTrees(RECORD, shift(1.1e-9), { ...DEFAULT_TOLERANCE, pressure_Pa: 1, transit_rel: 1 });
    expect([result.verdict, result.reason]).toEqual(['different', 'values']);
    const row = rowAt(RECORD, TREE.position[40]!);
    expect(result.first).toMatchObject({ what: 'position', rowA: row, vesselA: `supply:${row - 1}` });
    expect(result.first!.message).toContain('differs by 0.0011 µm, allowed 0.001');
    const positions = result.quantities[0]!;
    expect(positions.exceeded).toBe(1);
    expect(positions.maxAbsolute).toBeCloseTo(0.0011, 9);
    expect(positions.vesselA).toBe(`supply:${row - 1}`);
  });

  test('a radius, relative', () => {
    const result = compareTrees(
      RECORD,
      changed((tree) => (tree.radius[40]! *= 1.001)),
    );
    expect(result.reason).toBe('values');
    expect(result.first!.what).toBe('radius');
    const radius = result.quantities.find((summary) => summary.key === 'radius_rel')!;
    expect(radius.maxRelative).toBeCloseTo(1 - 1 / 1.001, 12);
    expect(
      compareTrees(
        RECORD,
        changed((tree) => (tree.radius[40]! *= 1.001)),
        allow(0.01),
      ).verdict,
    ).toBe('equivalent');
  });

  test('the first difference is the first in rows of A, named in both trees', () => {
    const copy = structuredClone(TREE);
    const rows = [...TREE.parent.keys()].slice(2);
    for (const row of rows.filter((row) => row % 7 === 0)) copy.radius[row]! *= 1.01;
    const first = Math.min(...rows.filter((row) => row % 7 === 0).map((row) => rowAt(RECORD, TREE.position[row]!)));
    const other = recordOf(shuffled(copy, '3'));
    const result = compareTrees(RECORD, other);
    expect(result.first!.rowA).toBe(first);
    const place = [...RECORD.forest.position.slice(3 * first, 3 * first + 3)];
    expect(result.first!.rowB).toBe(rowAt(other, place));
    expect(result.first!.vesselB).toBe(`supply:${rowAt(other, place) - 1}`);
  });

  test('a quantity that is compared later may differ first', () => {
    const rows = [20, 40].map((row) => rowAt(RECORD, TREE.position[row]!));
    const [early, late] = rows[0]! < rows[1]! ? [20, 40] : [40, 20];
    const other = changed((tree) => {
      tree.position[late!]![0] += 1e-5;
      tree.radius[early!]! *= 1.1;
    });
    const result = compareTrees(RECORD, other);
    expect(result.first).toMatchObject({ what: 'radius', rowA: Math.min(...rows) });
  });

  test('NaN is a difference, unless both have it', () => {
    const spoil = () => {
      const record = recordOf(TREE);
      (record.field!.pressure as Float64Array)[5] = Number.NaN;
      return record;
    };
    expect(compareTrees(RECORD, spoil()).first).toMatchObject({ what: 'pressure', rowA: 5 });
    expect(compareTrees(spoil(), spoil()).verdict).toBe('identical');
  });

  test('what one side lacks is a difference', () => {
    const bare = { ...RECORD, field: null };
    const result = compareTrees(RECORD, bare);
    expect([result.verdict, result.reason]).toEqual(['different', 'values']);
    expect(result.first).toMatchObject({ what: 'pressure', message: 'pressure is only in A: B has none', rowA: -1 });
    expect(compareTrees(bare, RECORD).first!.message).toBe('pressure is only in B: A has none');
    expect(result.quantities.filter(({ lacking }) => lacking === 'B')).toHaveLength(7);
    expect(compareTable(result)).toMatch(/^different: the same shape, but one lacks what the other has\n/);
    expect(compareJUnit(result)).toContain('<failure type="values" message="pressure: B has none">');
    // Values that differ have a place, and are named first.
    const both = compareTrees({ ...changed((tree) => (tree.radius[40]! *= 1.001)), field: null }, RECORD);
    expect(both.first!.what).toBe('radius');
    const neither = compareTrees(bare, bare, DEFAULT_TOLERANCE, { sameBytes: false });
    expect(neither.verdict).toBe('equivalent');
    expect(neither.quantities.find(({ key }) => key === 'pressure_Pa')).toMatchObject({ skipped: 'in neither' });
  });

  test('what the file of one side cannot hold is skipped', () => {
    const files = [{ name: '.swc', drops: ['flows', 'flow solution'] }];
    const other = changed((tree) => (tree.flow[40]! += 1));
    expect(compareTrees(RECORD, other).verdict).toBe('different');
    const result = compareTrees(RECORD, { ...other, field: null }, DEFAULT_TOLERANCE, { files });
    expect(result.verdict).toBe('equivalent');
    expect(result.quantities.filter(({ skipped }) => skipped === 'not held by .swc')).toHaveLength(8);
    expect(result.quantities.find(({ key }) => key === 'flow_rel')).toMatchObject({ compared: 0, lacking: null });
    expect(result.notes).toContain('flow is not compared: not held by .swc');
    expect(compareTable(result)).not.toMatch(/Infinity/);
    expect(compareJson(result)).not.toMatch(/"tolerance": null/);
    expect(compareJUnit(result)).toContain('name="flow_rel"><skipped message="not held by .swc"/>');
  });
});

describe('topology', () => {
  test('one terminal more', () => {
    const result = compareTrees(
      RECORD,
      changed((tree) => {
        tree.parent.push(20);
        tree.position.push([0.5, 0.5, 0.5]);
        tree.radius.push(1e-5);
        tree.flow.push(0);
      }),
    );
    expect([result.verdict, result.reason]).toEqual(['different', 'topology']);
    expect(result.countsB.vessels - result.countsA.vessels).toBe(1);
    expect(result.firstShape!.rowA).toBe(rowAt(RECORD, TREE.position[20]!));
    expect(result.firstShape!.message).toMatch(/^supply:\d+ (branches into|ends in)/);
  });

  test('one subtree moved', () => {
    // The subtree at row `moved` goes to a terminal elsewhere.
    const moved = TREE.parent.findIndex((parent, row) => parent > 10 && TREE.parent.includes(row));
    const under = (row: number): boolean => row === moved || (row >= 0 && under(TREE.parent[row]!));
    const target = TREE.parent.findIndex((_, row) => row > 1 && !TREE.parent.includes(row) && !under(row));
    const other = changed((tree) => (tree.parent[moved] = target));
    const result = compareTrees(RECORD, other);
    expect(result.reason).toBe('topology');
    const places = [TREE.parent[moved]!, target].map((row) => rowAt(RECORD, TREE.position[row]!));
    expect(result.firstShape!.rowA).toBe(Math.min(...places));
    expect(result.countsA.vessels).toBe(result.countsB.vessels);
    expect(result.first!.rowA).toBeLessThanOrEqual(result.firstShape!.rowA);
  });

  test('another kind, another number of trees', () => {
    const drain = compareTrees(RECORD, { ...RECORD, kinds: ['drain'] });
    expect(drain.firstShape!.message).toBe('tree supply is a supply tree in A, a drain tree in B');
    const two = twice(RECORD);
    expect(compareTrees(RECORD, two).firstShape!.message).toBe('A has 1 trees, B 2: second is only in B');
    expect(compareTrees(two, RECORD).firstShape!.message).toBe('A has 2 trees, B 1: second is only in A');
    expect(compareTrees(two, two).verdict).toBe('identical');
  });

  test('trees are matched by name, and another name is no difference', () => {
    const two = twice(RECORD);
    const swapped = { ...two, names: [two.names[1]!, two.names[0]!] };
    expect(compareTrees(two, swapped).verdict).toBe('equivalent');
    const renamed = compareTrees(RECORD, { ...RECORD, names: ['artery'] });
    expect(renamed.verdict).toBe('equivalent');
    expect(renamed.notes).toContain('tree 0 is called supply in A and artery in B');
  });
});

describe('renderings', () => {
  const same = compareTrees(RECORD, RECORD);
  const other = compareTrees(
    { ...RECORD, names: ['a<b>&"c'] },
    changed((tree) => (tree.radius[40]! *= 1.001)),
  );

  test('table', () => {
    expect(compareTable(same)).toMatch(/^identical: the same in every value\n/);
    const bytes = compareTrees(RECORD, RECORD, DEFAULT_TOLERANCE, { sameBytes: true });
    expect(compareTable(bytes)).toMatch(/^identical: the same in every bit\n/);
    const text = compareTable(other);
    expect(text).toMatch(/^different: the same shape/);
    expect(text).toContain(other.first!.message);
    for (const summary of other.quantities) expect(text).toContain(summary.title);
    expect(text).toContain('terminals');
  });

  test('JSON reads back', () => {
    const back = JSON.parse(compareJson(other));
    expect(back.verdict).toBe('different');
    expect(back.first).toEqual(other.first);
  });

  test('JUnit XML is well-formed, counts its cases and escapes names', () => {
    for (const result of [same, other, compareTrees(RECORD, { ...RECORD, field: null })]) {
      const text = compareJUnit(result, { name: 'A & B "<x>"\u0001' });
      const cases = assertWellFormed(text);
      const count = (name: string) => Number(text.match(new RegExp(`${name}="(\\d+)"`))![1]);
      expect(count('tests')).toBe(cases.testcase);
      expect(count('failures')).toBe(cases.failure ?? 0);
      expect(count('skipped')).toBe(cases.skipped ?? 0);
      expect(text).toContain('name="A &amp; B &quot;&lt;x&gt;&quot;\ufffd"');
    }
    expect(compareJUnit(other)).toContain('a&lt;b&gt;&amp;&quot;c');
    expect(compareJUnit(same)).not.toContain('<failure');
    expect(compareJUnit(other)).toContain('<failure type="values"');
  });
});

test('10⁵ rows take no time to speak of', () => {
  const big = recordOfSize(100_000);
  const start = performance.now();
  const result = compareTrees(big, { ...big, names: ['other'] });
  expect(result.matched).toBe(big.forest.count - 1);
  // A generous bound; about 0.1 s on a free core.
  expect(performance.now() - start).toBeLessThan(5000);
});

function allow(relative: number) {
  return Object.fromEntries(Object.keys(DEFAULT_TOLERANCE).map((key) => [key, relative]));
}

/** A record with the tree twice, the second called `second`. */
function twice(record: TreeRecord): TreeRecord {
  const { forest } = record;
  const n = forest.count;
  const double = (column: ArrayLike<number>) => Float64Array.from([...Array.from(column), ...Array.from(column)]);
  const both = {
    count: 2 * n,
    treeStart: Int32Array.from([0, n, 2 * n]),
    tree: Int32Array.from({ length: 2 * n }, (_, i) => (i < n ? 0 : 1)),
    parent: Int32Array.from({ length: 2 * n }, (_, i) =>
      i < n || i === n ? forest.parent[i % n]! : forest.parent[i - n]! + n,
    ),
    position: double(forest.position as unknown as ArrayLike<number>),
    radius: double(forest.radius as unknown as ArrayLike<number>),
    flow: double(forest.flow as unknown as ArrayLike<number>),
  };
  return {
    ...record,
    forest: both,
    field: null,
    kinds: ['supply', 'supply'],
    names: ['supply', 'second'],
    order: Int32Array.from(double(record.order as unknown as ArrayLike<number>)),
  };
}

/** A tree that is a heap: row i hangs from row (i − 1) / 2, renumbered into preorder. */
function recordOfSize(count: number): TreeRecord {
  const tree: LooseTree = {
    parent: [-1, 0],
    position: [
      [0, 0, 0],
      [0, 0, 1e-3],
    ],
    radius: [1e-3, 1e-3],
    flow: [0, 0],
  };
  for (let i = 2; i < count; i++) {
    tree.parent.push(i >> 1);
    tree.position.push([i * 1e-6, Math.sqrt(i) * 1e-5, Math.cbrt(i) * 1e-5]);
    tree.radius.push(1e-5);
    tree.flow.push(0);
  }
  return recordOf(tree);
}

/** Counts elements by name; throws where tags do not nest or a raw < or & is left. */
function assertWellFormed(text: string): Record<string, number> {
  const open: string[] = [];
  const counts: Record<string, number> = {};
  const body = text.replace(/^<\?xml [^?]*\?>\n/, '');
  let rest = body;
  const tag = /^<(\/?)([a-z-]+)((?: [a-z]+="[^"<&]*(?:&(?:amp|lt|gt|quot|apos);[^"<&]*)*")*)(\/?)>/;
  while (rest.length > 0) {
    if (rest[0] !== '<') {
      const end = rest.indexOf('<') < 0 ? rest.length : rest.indexOf('<');
      expect(rest.slice(0, end).replaceAll(/&(amp|lt|gt|quot|apos);/g, '')).not.toMatch(/&/);
      rest = rest.slice(end);
      continue;
    }
    const found = tag.exec(rest);
    if (found === null) throw new Error(`not a tag: ${rest.slice(0, 60)}`);
    const [whole, close, name, , empty] = found as unknown as [string, string, string, string, string];
    if (close === '/') expect(open.pop()).toBe(name);
    else {
      counts[name] = (counts[name] ?? 0) + 1;
      if (empty !== '/') open.push(name);
    }
    rest = rest.slice(whole.length);
  }
  expect(open).toEqual([]);
  return counts;
}

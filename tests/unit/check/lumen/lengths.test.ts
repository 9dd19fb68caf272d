import { describe, expect, it, test } from 'vitest';
import { checkLumen } from '../../../../src/check/lumen/check-lumen.ts';
import { shortenSegments } from '../../../../src/check/lumen/lengths.ts';
import { readNetwork } from '../../../../src/check/lumen/network.ts';
import { decodeText, encodeText } from '../../../../src/core/text.ts';
import { effectiveLengths } from '../../../../src/flow/effective-lengths.ts';
import { type LengthChoice, shortenField } from '../../../../src/flow/shortened-field.ts';
import { solveFlow } from '../../../../src/flow/solve.ts';
import { encodeMeshFolder } from '../../../../src/formats/mesh/mesh-folder.ts';
import { encodeNetworkCsv } from '../../../../src/formats/mesh/tables.ts';
import { buildLumen } from '../../../../src/mesh/build-lumen.ts';
import { networkTable } from '../../../../src/mesh/network-table.ts';
import type { TreeKind } from '../../../../src/tree/forest.ts';
import { forkSketch, randomSketch, sketchForest } from '../../../support/lumen-forests.ts';

/*
 * Effective lengths in a mesh folder, which the checker works out again. Whether they are right is for the independent
 * flow solution to say (tests/integration/effective-lengths.slow.test.ts).
 */

const BLOOD = { viscosity: 3.5e-3, density: 1060 };

describe('lengths worked out twice', () => {
  it.each(['s21', 's25', 's33'])('agree on a random tree with bends and junctions of four: %s', (seed) => {
    for (const kind of ['supply', 'drain'] as const) {
      const forest = sketchForest(randomSketch(seed, { vessels: 40, leastRatio: 0.2, bends: 0.3, triples: 0.4 }));
      const field = solveFlow(forest, [kind], { rootPressures: [1000], ...BLOOD });
      const rows = networkTable(forest, field, { kinds: [kind] });
      const network = readNetwork('network.csv', decodeText(encodeNetworkCsv(rows)));
      const again = shortenSegments(network);
      const made = effectiveLengths(forest);
      let shorter = 0;
      for (let k = 0; k < network.count; k++) {
        const row = k + 1;
        expect(again[k]! / made[row]!).toBeCloseTo(1, 9);
        if (Math.abs(again[k]! / network.length[k]! - 1) > 0.01) shorter++;
      }
      expect(shorter).toBeGreaterThan(network.count / 2);
    }
  });
});

const forest = sketchForest(forkSketch(40, 30, 0.8, 0.6));

function folder(used: LengthChoice, kind: TreeKind): Map<string, string> {
  const axis = solveFlow(forest, [kind], { rootPressures: [1000], ...BLOOD });
  const lengths = effectiveLengths(forest);
  const effective = shortenField(axis, [kind], lengths);
  const files = encodeMeshFolder({
    mesh: buildLumen(forest, { around: 12, kinds: [kind] }),
    forest,
    field: used === 'axis' ? axis : effective,
    kinds: [kind],
    networks: { used, effectiveLengths: lengths, axis: axis.pressure, effective: effective.pressure },
    ...BLOOD,
  });
  return new Map(files.map(({ name, bytes }) => [name, decodeText(bytes)]));
}

function broken(files: ReadonlyMap<string, string>): string[] {
  const bytes = (name: string) => encodeText(files.get(name)!);
  const result = checkLumen({
    surface: bytes('lumen.stl'),
    boundary: bytes('boundary.csv'),
    network: bytes('network.csv'),
    notes: bytes('mesh.json'),
  });
  expect(result.promises.filter(({ id }) => id === 'network-drops' || id === 'network-lengths')).toMatchObject([
    { checked: 3 },
    { checked: 3 },
  ]);
  return result.promises.filter(({ held }) => held === false).map(({ id }) => id);
}

const FOLDERS = {
  axis: folder('axis', 'supply'),
  effective: folder('effective', 'supply'),
  drain: folder('effective', 'drain'),
};

function changed(name: string, change: (text: string) => string, of: LengthChoice = 'effective'): Map<string, string> {
  const is = change(FOLDERS[of].get(name)!);
  expect(is).not.toBe(FOLDERS[of].get(name));
  return new Map(FOLDERS[of]).set(name, is);
}

/** One cell of a table's first line of numbers, times a factor. */
const scaled =
  (column: string, factor: number, line = 1) =>
  (text: string) => {
    const rows = text.split('\n').map((row) => row.split(','));
    const at = rows[0]!.indexOf(column);
    rows[line]![at] = String(factor * Number(rows[line]![at]));
    return rows.map((row) => row.join(',')).join('\n');
  };

describe('a mesh folder', () => {
  it('holds its promises with either network', () => {
    for (const files of Object.values(FOLDERS)) expect(broken(files)).toEqual([]);
    const drops = JSON.parse(FOLDERS.axis.get('mesh.json')!).network.drops;
    expect(drops.length).toBe(2);
    for (const { axis_Pa, effective_Pa } of drops) expect(axis_Pa).toBeGreaterThan(effective_Pa);
    expect(JSON.parse(FOLDERS.effective.get('mesh.json')!).network).toEqual({ lengths: 'effective', drops });
  });

  const notes = (change: (network: { lengths: string; drops: { patch: string; axis_Pa: number }[] }) => void) => () =>
    changed('mesh.json', (text) => {
      const value = JSON.parse(text);
      change(value.network);
      return JSON.stringify(value);
    });
  test.each([
    ['a wrong length', () => changed('network.csv', scaled('length_m', 1.001)), ['network-lengths', 'network-drops']],
    [
      'a wrong effective length',
      () => changed('network.csv', scaled('effective_length_m', 1.001)),
      ['network-drop', 'network-lengths'],
    ],
    ['a wrong drop', () => changed('boundary.csv', scaled('drop_effective_Pa', 1.001, 2)), ['network-drops']],
    ['a wrong drop in mesh.json', notes((network) => (network.drops[0]!.axis_Pa *= 1.001)), ['network-drops']],
    ['a drop too few', notes((network) => network.drops.pop()), ['network-drops']],
    [
      'the other network named',
      notes((network) => {
        network.lengths = 'axis';
      }),
      ['network-drop', 'network-drops'],
    ],
  ])('with %s does not', (_, make, ids) => expect(broken(make())).toEqual(ids));

  it('that names no network is refused', () => {
    expect(() =>
      broken(
        notes((network) => {
          network.lengths = 'other';
        })(),
      ),
    ).toThrow(/network\.lengths: got "other", expected axis or effective/);
  });
});

import { fromSi, toSi } from '../../core/units.ts';
import type { TreeRecord } from '../../tree/forest.ts';
import { assembleTree } from '../assemble.ts';
import { FaultList } from '../faults.ts';
import type { DecodedTree, EncodedFile, NamedBytes, TreeFormat } from '../format.ts';
import { eachLine } from '../text/lines.ts';
import { parseReal, printReal } from '../text/numbers.ts';
import { TextWriter } from '../text/writer.ts';

/*
 * Source: INCF swc-specification: `#` comments; id, type, x, y, z, radius, parent a line; micrometres; ids from 1,
 * a parent before its children, −1 for none. The types are of nerve cells; 0 (undefined) is the one that claims nothing.
 */

const UNDEFINED_TYPE = 0;

function encodeSwc(record: TreeRecord): EncodedFile[] {
  const { forest } = record;
  const out = new TextWriter();
  out.add('# lengths in micrometres; radius of the vessel that ends at the sample; a root repeats its first vessel\n');
  record.names.forEach((name, t) => {
    out.add(`# tree ${t} ${name} ${record.kinds[t]}\n`);
  });
  for (let i = 0; i < forest.count; i++) {
    const parent = forest.parent[i]!;
    const p = forest.position;
    const um = (value: number) => printReal(fromSi(value, 'um'));
    out.add(
      `${i + 1} ${UNDEFINED_TYPE} ${um(p[3 * i]!)} ${um(p[3 * i + 1]!)} ${um(p[3 * i + 2]!)} ${um(forest.radius[i]!)} ${parent < 0 ? -1 : parent + 1}\n`,
    );
  }
  return [{ suffix: '.swc', bytes: out.bytes() }];
}

function decodeSwc(files: readonly NamedBytes[]): DecodedTree {
  const { name, bytes } = files[0]!;
  const faults = new FaultList();
  const names: string[] = [];
  const kinds: string[] = [];
  let columns = new Float64Array(7 * 256);
  let line = new Int32Array(256);
  let count = 0;
  eachLine(bytes, (text, number) => {
    const trimmed = text.trim();
    if (trimmed === '') return;
    if (trimmed.startsWith('#')) {
      const match = /^# tree (\d+) (\S+) (supply|drain)$/.exec(trimmed);
      if (match !== null && Number(match[1]) === names.length) {
        names.push(match[2]!);
        kinds.push(match[3]!);
      }
      return;
    }
    const words = trimmed.split(/\s+/);
    if (words.length !== 7) {
      faults.add('fields', `${name}:${number}`, `got ${words.length} numbers, expected 7: id type x y z radius parent`);
      return;
    }
    if (count === line.length) {
      const longer = new Int32Array(2 * count);
      longer.set(line);
      line = longer;
      const grown = new Float64Array(14 * count);
      grown.set(columns);
      columns = grown;
    }
    for (let k = 0; k < 7; k++) {
      const value = parseReal(words[k]!);
      if (Number.isNaN(value)) faults.add('number', `${name}:${number}`, `got "${words[k]}", expected a number`);
      columns[7 * count + k] = value;
    }
    line[count++] = number;
  });
  faults.throwIfAny();
  const rowOf = numberSamples(columns, count, name, line, faults);
  const vesselSample: number[] = [];
  const position = new Float64Array(3 * count);
  const parent = new Int32Array(count).fill(-1);
  for (let i = 0; i < count; i++) {
    for (let k = 0; k < 3; k++) position[3 * i + k] = toSi(columns[7 * i + 2 + k]!, 'um');
    const id = columns[7 * i + 6]!;
    if (id < 0) continue;
    parent[i] = rowOf(id);
    if (parent[i]! < 0)
      faults.add('no-node', `${name}:${line[i]}`, `got parent ${id}, expected the id of a sample or -1`);
    else vesselSample.push(i);
  }
  faults.throwIfAny();
  const to = Int32Array.from(vesselSample);
  const radius = new Float64Array(to.length);
  for (let v = 0; v < to.length; v++) radius[v] = columns[7 * to[v]! + 5]!;
  return assembleTree(
    {
      where: name,
      nodes: count,
      vessels: to.length,
      position,
      from: to.map((i) => parent[i]!),
      to,
      radius: radius.map((value) => toSi(value, 'um')),
      flow: null,
      tree: null,
      order: null,
      vesselField: {},
      nodeField: {},
      territory: null,
      names: names.length > 0 ? names : null,
      kinds: kinds.length > 0 ? kinds : null,
      provenance: null,
      nameNode: (node) => `${name}:${line[node]}`,
      nameVessel: (vessel) => `${name}:${line[to[vessel]!]}`,
    },
    faults,
    [],
  );
}

/** Row of a sample's id. */
function numberSamples(
  columns: Float64Array,
  count: number,
  name: string,
  line: Int32Array,
  faults: FaultList,
): (id: number) => number {
  const rows = new Map<number, number>();
  let plain = true;
  for (let i = 0; i < count; i++) {
    const id = columns[7 * i]!;
    if (!(Number.isInteger(id) && id >= 0)) {
      faults.add('id', `${name}:${line[i]}`, `got id ${id}, expected a whole number`);
    }
    if (id !== i + 1) plain = false;
  }
  if (plain) return (id) => (Number.isInteger(id) && id >= 1 && id <= count ? id - 1 : -1);
  for (let i = 0; i < count; i++) {
    const id = columns[7 * i]!;
    if (rows.has(id)) faults.add('id', `${name}:${line[i]}`, `got id ${id} twice`);
    rows.set(id, i);
  }
  return (id) => rows.get(id) ?? -1;
}

export const SWC: TreeFormat = {
  id: 'swc',
  title: 'SWC samples of the INCF specification; tree names and kinds in comments',
  extensions: ['.swc'],
  parts: ['.swc'],
  units: 'micrometres, as the standard has it',
  precision: 1e-15,
  keeps: ['positions', 'radii', 'tree names and kinds'],
  drops: ['flows', 'tree index', 'orders', 'flow solution', 'territories', 'provenance'],
  encode: encodeSwc,
  decode: decodeSwc,
};

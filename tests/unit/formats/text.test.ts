import { describe, expect, it } from 'vitest';
import { FaultList } from '../../../src/formats/faults.ts';
import { eachLine } from '../../../src/formats/text/lines.ts';
import { columnToSi, parseReal, printReal, unitOfName } from '../../../src/formats/text/numbers.ts';
import { readTable } from '../../../src/formats/text/table.ts';
import { TextWriter } from '../../../src/formats/text/writer.ts';
import { CSV } from '../../../src/formats/tree/csv.ts';
import { SWC } from '../../../src/formats/tree/swc.ts';
import { decodeBase64 } from '../../../src/formats/vtk/base64.ts';

const bytes = (text: string) => new TextEncoder().encode(text);

describe('eachLine and TextWriter', () => {
  it('give back lines across blocks, with either end, a mark before and no end behind', () => {
    const out = new TextWriter();
    const lines = Array.from({ length: 60_000 }, (_, i) => `${i}${'µ'.repeat(i % 40)}`);
    out.add('\ufeff');
    for (const [i, line] of lines.entries())
      out.add(i === lines.length - 1 ? line : line + (i % 2 === 0 ? '\n' : '\r\n'));
    const all = out.bytes();
    expect(all.length).toBeGreaterThan(2 << 20);
    const got: string[] = [];
    eachLine(all, (line, number) => {
      got.push(line);
      expect(number).toBe(got.length);
    });
    expect(got).toEqual(lines);
    expect(out.bytes().length).toBe(0);
  });

  it('take a line longer than a block', () => {
    const got: number[] = [];
    eachLine(bytes(`a\n${'b'.repeat(3 << 20)}\nc`), (line) => got.push(line.length));
    expect(got).toEqual([1, 3 << 20, 1]);
  });
});

describe('numbers', () => {
  it('are numbers or nothing', () => {
    for (const [text, value] of [
      ['1', 1],
      [' -1.5e-3 ', -1.5e-3],
      ['.5', 0.5],
      ['5.', 5],
      ['+2E3', 2000],
    ] as const) {
      expect(parseReal(text)).toBe(value);
    }
    for (const text of ['', ' ', '0x10', 'Infinity', 'NaN', '1e', '1,5', '--1', '1_000'])
      expect(parseReal(text)).toBeNaN();
    expect(parseReal('1e999')).toBe(Infinity);
    for (const x of [-0, 1 / 3, 5e-324, 1.7976931348623157e308, -1e21])
      expect(Object.is(parseReal(printReal(x)), x)).toBe(true);
  });

  it('find the unit in a name', () => {
    expect(unitOfName('x_mm', 'x', 'length')).toBe('mm');
    expect(unitOfName('flow_m3_s', 'flow', 'flow')).toBe('m3_s');
    for (const name of ['x', 'x_Pa', 'xx_mm', 'x_toString', 'x_']) expect(unitOfName(name, 'x', 'length')).toBeNull();
    const column = Float64Array.of(12, 0.1);
    columnToSi(column, 'mm');
    expect(Array.from(column)).toEqual([0.012, 0.0001]);
  });
});

describe('readTable', () => {
  const read = (text: string) => {
    const faults = new FaultList();
    const table = readTable(
      bytes(text),
      't.csv',
      (name) => (name === 'n' ? 'real' : name === 's' ? 'text' : null),
      faults,
    );
    return { table, faults };
  };

  // Source: RFC 4180, quoted fields with commas and doubled quotes.
  it('reads quoted fields, spaces and columns it was not asked for', () => {
    const { table, faults } = read('\ufeffx, n ,s\r\n"1,2",3,"a ""b"""\r\n\r\n,4,\n');
    expect(faults.count).toBe(0);
    expect(Array.from(table!.reals.get('n')!)).toEqual([3, 4]);
    expect(table!.texts.get('s')).toEqual(['a "b"', '']);
    expect(Array.from(table!.line)).toEqual([2, 4]);
  });

  it('names the line of what is broken', () => {
    const { faults } = read('n,s,n\n1,2\nx,2,3\n"1,2,3\n1,2,3,4\n');
    expect(() => faults.throwIfAny()).toThrow(
      [
        't.csv:1: got column n twice',
        't.csv:2: got 2 fields, expected 3',
        't.csv:3: got n "x", expected a number',
        't.csv:4: got a quote without its other, expected both on one line',
        't.csv:5: got 4 fields, expected 3',
      ].join('\n'),
    );
  });
});

describe('csv', () => {
  it('takes columns in any order, other units, and any node numbers', () => {
    const nodes = 'z_um,node,x_um,y_um\n0,70,0,0\n0,7,1000,0\n500,-3,2000,1000\n';
    const vessels = 'radius_mm,to,from\n0.2,7,70\n0.1,-3,7\n';
    const { record } = CSV.decode([
      { name: 't.nodes.csv', bytes: bytes(nodes) },
      { name: 't.vessels.csv', bytes: bytes(vessels) },
    ]);
    expect(Array.from(record.forest.position)).toEqual([0, 0, 0, 1e-3, 0, 0, 2e-3, 1e-3, 0.5e-3]);
    expect(Array.from(record.forest.radius)).toEqual([2e-4, 2e-4, 1e-4]);
  });

  it('names the file and line of a fault', () => {
    const nodes = 'node,x_m,y_m,z_m\n0,0,0,0\n0,1,0,0\n';
    const vessels = 'from,to,radius_m\n0,5,1\n';
    const decode = () =>
      CSV.decode([
        { name: 't.nodes.csv', bytes: bytes(nodes) },
        { name: 't.vessels.csv', bytes: bytes(vessels) },
      ]);
    expect(decode).toThrow('t.nodes.csv:3: got node 0 twice');
    expect(decode).toThrow('t.vessels.csv:2: got to 5, expected a node');
  });
});

describe('swc', () => {
  const decode = (text: string) => SWC.decode([{ name: 't.swc', bytes: bytes(text) }]);

  // Source: INCF swc-specification: seven columns, micrometres, −1 for no parent; ids and order as another writer may have them.
  it('reads samples in micrometres, in any order', () => {
    const { record } = decode('# c\n\n 12 3 10 0 0 1.5 5\n5 1 0 0 0 4 -1\n20 3 20 5 0 1 12\n');
    expect(Array.from(record.forest.position)).toEqual([0, 0, 0, 10e-6, 0, 0, 20e-6, 5e-6, 0]);
    expect(Array.from(record.forest.radius)).toEqual([1.5e-6, 1.5e-6, 1e-6]);
  });

  it('names the line of a fault', () => {
    expect(() => decode('1 0 0 0 0 1 -1\n2 0 1 0 0 1\n')).toThrow('t.swc:2: got 6 numbers, expected 7');
    expect(() => decode('1 0 0 0 0 1 -1\n2 0 1 0 0 nan 1\n')).toThrow('t.swc:2: got "nan", expected a number');
    expect(() => decode('1 0 0 0 0 1 -1\n2 0 1 0 0 1 9\n')).toThrow(
      't.swc:2: got parent 9, expected the id of a sample',
    );
    expect(() => decode('1 0 0 0 0 1 -1\n1 0 1 0 0 1 1\n')).toThrow('t.swc:2: got id 1 twice');
    expect(() => decode('1 0 0 0 0 1 2\n2 0 1 0 0 1 1\n')).toThrow('lies on a ring');
    expect(() => decode('1 0 0 0 0 1 -1\n2 0 1 0 0 -1 1\n')).toThrow('t.swc:2: got radius -0.000001 m');
  });
});

describe('decodeBase64', () => {
  // Source: RFC 4648, section 10, test vectors.
  it('decodes the vectors of the standard', () => {
    for (const text of ['', 'f', 'fo', 'foo', 'foob', 'fooba', 'foobar']) {
      const encoded = Buffer.from(text).toString('base64');
      expect(Buffer.from(decodeBase64(bytes(encoded))!).toString()).toBe(text);
    }
    expect(Buffer.from(decodeBase64(bytes('Zm9v\n YmFy'))!).toString()).toBe('foobar');
    expect(Buffer.from(decodeBase64(bytes('Zg==Zm8='))!).toString()).toBe('ffo');
    for (const text of ['Z', 'Zg', 'Zg=', '=', 'Z===', 'Zg=a', 'Z-g=']) expect(decodeBase64(bytes(text))).toBeNull();
  });
});

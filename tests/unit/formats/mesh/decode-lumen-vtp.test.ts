import { describe, expect, it } from 'vitest';
import { decodeLumenVtp, encodeLumenVtp } from '../../../../src/formats/mesh/lumen-vtp.ts';
import type { MeshSurface } from '../../../../src/formats/mesh/mesh-surface.ts';

const tetrahedron: MeshSurface = {
  position: Float64Array.of(1 / 3, -1e-6, 2 / 7, 1.25, 1e-7, 2 / 7, 1 / 3, Math.SQRT2, 1 / 7, 0.5, 0.1, 3.3e-3),
  unit: 'um',
  triangle: Int32Array.of(0, 1, 3, 0, 2, 1, 1, 2, 3, 0, 3, 2),
  patch: Int32Array.of(1, 0, 2, 0),
  patches: [{ name: 'wall' }, { name: 'inlet_a' }, { name: 'outlet_7' }],
  vessel: Int32Array.of(5, 0, 7, 123_456),
  pressure: Float64Array.of(8000, 1 / 3, 100, 2000.5),
  wallShear: Float64Array.of(1, 2, 3, 4 / 3),
};
const read = (surface: MeshSurface) => decodeLumenVtp(encodeLumenVtp(surface), 'lumen.vtp');
const spoilt = (change: (text: string) => string) => {
  const text = new TextDecoder('latin1').decode(encodeLumenVtp(tetrahedron));
  return Uint8Array.from(change(text), (letter) => letter.charCodeAt(0));
};

describe('decodeLumenVtp', () => {
  it('gives back what was written, bit for bit', () => {
    expect(read(tetrahedron)).toEqual(tetrahedron);
    expect(encodeLumenVtp(read(tetrahedron))).toEqual(encodeLumenVtp(tetrahedron));
    const bare = { ...tetrahedron, pressure: null, wallShear: null };
    expect(read(bare)).toEqual(bare);
  });

  it('reads a file that another program saved again: text, float32, 64-bit offsets', () => {
    const list = (tag: string, name: string, type: string, values: string) =>
      `<${tag} type="${type}" Name="${name}" NumberOfTuples="${type === 'String' ? 1 : ''}" format="ascii">${values}</${tag}>`;
    const codes = (text: string) => [...new TextEncoder().encode(text)].join(' ');
    const file = `<?xml version="1.0"?>
<VTKFile type="PolyData" version="0.1" byte_order="LittleEndian"><PolyData>
<FieldData>${list('Array', 'length_unit', 'String', codes('mm\0'))}
${list('Array', 'patch_names', 'String', codes('wall\0inlet_0\0'))}</FieldData>
<Piece NumberOfPoints="3" NumberOfVerts="0" NumberOfLines="0" NumberOfStrips="0" NumberOfPolys="1">
<PointData></PointData>
<CellData>${list('DataArray', 'patch_number', 'Int32', '1')}${list('DataArray', 'vessel', 'Int32', '4')}</CellData>
<Points><DataArray type="Float32" Name="Points" NumberOfComponents="3" format="ascii">0 0 0 1 0 0 0 1.5 0</DataArray></Points>
<Polys>${list('DataArray', 'connectivity', 'Int64', '0 1 2')}${list('DataArray', 'offsets', 'Int64', '3')}</Polys>
</Piece></PolyData></VTKFile>`;
    expect(decodeLumenVtp(new TextEncoder().encode(file), 'again.vtp')).toEqual({
      position: Float64Array.of(0, 0, 0, 1, 0, 0, 0, 1.5, 0),
      unit: 'mm',
      triangle: Int32Array.of(0, 1, 2),
      patch: Int32Array.of(1),
      patches: [{ name: 'wall' }, { name: 'inlet_0' }],
      vessel: Int32Array.of(4),
      pressure: null,
      wallShear: null,
    });
  });

  it.each([
    ['no unit', { unit: '' as 'm' }, /lumen\.vtp length_unit: got "", expected m, mm, um/],
    ['a corner that is none', { triangle: Int32Array.of(0, 1, 3, 0, 2, -1, 1, 2, 3, 0, 3, 2) }, /connectivity: got -1/],
    ['a name that needs quotes', { patches: [{ name: 'wall' }, { name: 'a"b' }, { name: 'c' }] }, /got "a\\"b"/],
    ['a name twice', { patches: [{ name: 'wall' }, { name: 'c' }, { name: 'c' }] }, /got "c", expected .* none twice/],
    ['too few vessels', { vessel: Int32Array.of(1, 2) }, /lumen\.vtp vessel: got 2 numbers, expected 4/],
    ['too few pressures', { pressure: Float64Array.of(1, 2) }, /pressure_Pa: got 2 numbers, expected 4/],
    ['a point nowhere', { position: tetrahedron.position.with(4, Number.NaN) }, /Points: got NaN at point 1/],
  ] as const)('refuses %s', (_, change, says) => {
    expect(() => read({ ...tetrahedron, ...change } as MeshSurface)).toThrow(says);
  });

  it('refuses a patch number that no name stands for', () => {
    const numbers = (...list: number[]) => String.fromCharCode(...new Uint8Array(Int32Array.from(list).buffer));
    const file = spoilt((text) => text.replace(numbers(1, 0, 2, 0), numbers(1, 0, 3, 0)));
    expect(() => decodeLumenVtp(file, 'lumen.vtp')).toThrow(
      /lumen\.vtp patch_number: got 3 at position 2, expected 0 to 2/,
    );
  });

  it('refuses what is no VTK file, a file cut short, and one that lacks an array', () => {
    expect(() =>
      decodeLumenVtp(
        spoilt((text) => text.replaceAll('patch_number', 'patch_nomber')),
        'x.vtp',
      ),
    ).toThrow(/x\.vtp CellData: got no array patch_number, expected one/);
    expect(() =>
      decodeLumenVtp(
        spoilt((text) => text.slice(0, -300)),
        'x.vtp',
      ),
    ).toThrow(/x\.vtp/);
    expect(() => decodeLumenVtp(new TextEncoder().encode('solid wall\n'), 'x.vtp')).toThrow(/x\.vtp/);
    expect(() =>
      decodeLumenVtp(
        spoilt((text) => text.replace('"length_unit"', '"length_onut"')),
        'x.vtp',
      ),
    ).toThrow(/FieldData: got no array length_unit/);
  });
});

import { describe, expect, it } from 'vitest';
import { InputError } from '../../../../src/core/errors.ts';
import { decodeObj } from '../../../../src/formats/surface/obj.ts';
import { decodePly } from '../../../../src/formats/surface/ply.ts';
import { decodeStl } from '../../../../src/formats/surface/stl.ts';
import { decodeSurface } from '../../../../src/formats/surface/surface-formats.ts';
import { checkSurface } from '../../../../src/tissue/check-surface.ts';
import { BROKEN_SURFACES, SOUND_SURFACES } from '../../../support/broken-surfaces.ts';
import { objText, plyBinary, plyText, stlBinary, stlText, text } from '../../../support/surface-files.ts';
import { moved, notchedCube } from '../../../support/surfaces.ts';

/** Coordinates like 1/3 and 1e-6 and distinct axes, so that swapped axes and lost digits show. */
const odd = moved(notchedCube(), ([x, y, z]) => [x / 3 + 1e-6, y * 7 - 2, z / 11]);

/** Coordinates of every triangle's corners, whatever row they have. */
function soup({ position, triangle }: { position: Float64Array; triangle: Int32Array }): number[] {
  return [...triangle].flatMap((row) => [...position.slice(3 * row, 3 * row + 3)]);
}

describe('surface decoders', () => {
  const wanted = soup(odd);
  it.each([
    ['ASCII STL', decodeStl(text(stlText(odd)), 'a.stl'), 0],
    ['binary STL', decodeStl(stlBinary(odd), 'a.stl'), 2e-7],
    ['binary STL that starts with solid', decodeStl(stlBinary(odd, 'solid looks like text'), 'a.stl'), 2e-7],
    ['ASCII PLY', decodePly(text(plyText(odd)), 'a.ply'), 0],
    ['little-endian PLY', decodePly(plyBinary(odd, true), 'a.ply'), 0],
    ['big-endian PLY', decodePly(plyBinary(odd, false), 'a.ply'), 0],
    ['OBJ', decodeObj(text(objText(odd)), 'a.obj'), 0],
    ['OBJ with Windows line ends', decodeObj(text(objText(odd).replaceAll('\n', '\r\n')), 'a.obj'), 0],
  ])('%s gives back every triangle, corners merged', (_, surface, relative) => {
    // Binary STL holds float32: half a unit in the last of 24 bits is 6e-8 relative, to the largest coordinate 5.
    const got = soup(surface);
    expect(got.length).toBe(wanted.length);
    for (let i = 0; i < got.length; i++) expect(Math.abs(got[i]! - wanted[i]!)).toBeLessThanOrEqual(relative * 5);
    expect(surface.position.length).toBe(3 * 16);
  });

  it('splits polygons in fans and reads every way to name a corner', () => {
    const file = `mtllib none.mtl
o box # a comment
v 0 0 0
v 1 0 0
v 1 1 0
v 0 1 0 1.0
v 0 0 2 0.5 0.5 0.5
vt 0 0
vn 0 0 1
s off
f 4/1/1 3/1 \\
 2//1 1
f 1 2 5
f 2 3 5
f 3 4 5
f -2 -5 -1
`;
    const surface = decodeObj(text(file), 'a.obj');
    expect(surface.triangle.length / 3).toBe(2 + 4);
    // A pyramid of base 1 and height 2.
    expect(checkSurface(surface, 'a.obj').volume).toBeCloseTo((1 * 2) / 3, 14);
  });

  it('passes over elements and properties of PLY that are not needed', () => {
    const file = `ply
format ascii 1.0
comment a pyramid with extras
element material 2
property list uchar float shades
property uchar kind
element vertex 5
property uchar red
property float z
property float y
property float x
property list int float weights
element face 5
property float quality
property list uchar uint vertex_index
end_header
2 0.5 nan 1
0 3
9 0 0 0 0
9 0 0 1 1 0.5
9 0 1 1 0
9 0 1 0 2 nan 1
9 2 0 0 0
1 4 3 2 1 0
1 3 0 1 4
1 3 1 2 4
1 3 2 3 4
1 3 3 0 4
`;
    expect(checkSurface(decodePly(text(file), 'a.ply'), 'a.ply').volume).toBeCloseTo((1 * 2) / 3, 14);
  });

  it('takes several solids of one STL together, −0 as 0, and any case', () => {
    const halves = stlText(odd).split('  facet');
    const parts = `${halves.slice(0, 9).join('  facet')}endsolid\nSOLID second\n  facet${halves.slice(9).join('  facet')}`;
    const surface = decodeStl(text(parts.replaceAll('facet', 'FACET').replaceAll(' 0 ', ' -0 ')), 'a.stl');
    expect(surface.position.length).toBe(3 * 16);
    expect(soup(surface)).toEqual(wanted.map((value) => value + 0));
  });

  it('names the line of a fault', () => {
    const broken = stlText(odd).split('\n');
    broken[3] = '      vertex 0 oops 0';
    expect(() => decodeStl(text(broken.join('\n')), 'a.stl')).toThrow(
      /^a\.stl:4: got "oops", expected a number for y$/,
    );
  });

  it('refuses an extension it does not know', () => {
    expect(() => decodeSurface(new Uint8Array(4), 'a.step')).toThrow(/expected a file of \.stl, \.ply, \.obj/);
  });
});

describe('broken surfaces', () => {
  it('are many and told apart by name', () => {
    expect(BROKEN_SURFACES.length).toBeGreaterThanOrEqual(60);
    expect(new Set(BROKEN_SURFACES.map(({ name, extension }) => name + extension)).size).toBe(BROKEN_SURFACES.length);
  });

  it.each(BROKEN_SURFACES)('$name ($extension) is refused in words', ({ name, extension, bytes, expected }) => {
    const file = `broken${extension}`;
    const before = bytes.slice();
    let caught: unknown = null;
    try {
      checkSurface(decodeSurface(bytes, file), file);
    } catch (error) {
      caught = error;
    }
    expect(caught, `${name} was accepted`).toBeInstanceOf(InputError);
    expect((caught as InputError).message).toMatch(expected);
    for (const fault of (caught as InputError).faults) expect(fault.where).toMatch(/^broken\.(stl|ply|obj)(:\d+)?$/);
    expect(bytes).toEqual(before);
  });

  it.each(SOUND_SURFACES)('%s passes in every format', (_, surface) => {
    const { volume } = checkSurface(surface, 'x');
    for (const [bytes, file] of [
      [stlBinary(surface), 'x.stl'],
      [text(stlText(surface)), 'x.stl'],
      [plyBinary(surface, true), 'x.ply'],
      [text(objText(surface)), 'x.obj'],
    ] as const)
      expect(checkSurface(decodeSurface(bytes, file), file).volume / volume).toBeCloseTo(1, 5);
  });

  it('cut at any byte, a sound file never hangs, crashes or passes as another shape', () => {
    for (const [bytes, file] of [
      [stlBinary(odd), 'x.stl'],
      [text(stlText(odd)), 'x.stl'],
      [text(plyText(odd)), 'x.ply'],
      [plyBinary(odd, true), 'x.ply'],
      [text(objText(odd)), 'x.obj'],
    ] as const) {
      const whole = checkSurface(decodeSurface(bytes, file), file).volume;
      for (let end = 0; end < bytes.length; end += 1 + Math.floor(bytes.length / 400)) {
        try {
          // A cut inside the last number or line end may leave a file that is still whole.
          expect(checkSurface(decodeSurface(bytes.slice(0, end), file), file).volume / whole).toBeCloseTo(1, 5);
        } catch (error) {
          expect(error).toBeInstanceOf(InputError);
        }
      }
    }
  });
});

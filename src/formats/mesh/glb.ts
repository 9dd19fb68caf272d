import { InvariantError, inputError } from '../../core/errors.ts';
import { TextWriter } from '../text/writer.ts';
import { patchColour, scaleColour } from './colours.ts';
import { positionsIn } from './length-unit.ts';
import type { MeshSurface } from './mesh-surface.ts';
import { partNormals, takeApart } from './patch-parts.ts';

/** What the colours of a GLB may tell. */
export const COLOUR_BY = ['patch', 'pressure', 'wall-shear'] as const;
export type ColourBy = (typeof COLOUR_BY)[number];

/** Bytes that a GLB can count. */
const MOST_BYTES = 0xffff_ffff;
const [FLOAT, UNSIGNED_INT, UNSIGNED_SHORT] = [5126, 5125, 5123];
const [ARRAY_BUFFER, ELEMENT_ARRAY_BUFFER] = [34962, 34963];

/**
 * A lumen surface as binary glTF 2.0: one mesh, and in it a primitive and a material for each patch, both named by it;
 * metres, float32. Coordinates stay as they are: no axis is turned up. With a quantity, materials are white and the
 * colours of the corners tell it, from its least to its greatest value, which `extras` of the mesh states.
 *
 * @throws InputError where the quantity is not known, or the file would be larger than a GLB can be
 * Source: glTF 2.0 Specification (Khronos Group; ISO/IEC 12113:2022): GLB of two chunks padded to 4 bytes, JSON with
 * spaces; accessors of POSITION with bounds; colours and factors in proportion to light.
 * Cost: O(v + f); corners on rims are written once a patch.
 */
export function encodeGlb(surface: MeshSurface, colourBy: ColourBy = 'patch'): Uint8Array {
  const metres = positionsIn(surface.position, 'm', surface.unit);
  const parts = takeApart(surface);
  const { vertex, corner } = parts;
  const position = new Float32Array(3 * vertex.length);
  for (let i = 0; i < vertex.length; i++) for (let k = 0; k < 3; k++) position[3 * i + k] = metres[3 * vertex[i]! + k]!;
  const values = quantityOf(surface, colourBy);
  const arrays: BinaryArray[] = [
    { data: position, stride: 12, target: ARRAY_BUFFER },
    { data: partNormals(parts, metres), stride: 12, target: ARRAY_BUFFER },
  ];
  if (values !== null) arrays.push({ data: cornerColours(values, vertex), stride: 8, target: ARRAY_BUFFER });
  arrays.push({ data: corner, stride: null, target: ELEMENT_ARRAY_BUFFER });

  const json = new TextWriter();
  json.add('{"asset":{"version":"2.0","generator":"vesselwright"},"scene":0,"scenes":[{"name":"lumen","nodes":[0]}],');
  json.add('"nodes":[{"name":"lumen","mesh":0}],"meshes":[{"name":"lumen","primitives":[');
  // A primitive of nothing is not allowed.
  const shown = surface.patches.flatMap((patch, p) => {
    const faces = parts.triangleStart[p + 1]! - parts.triangleStart[p]!;
    return faces === 0 ? [] : [{ name: patch.name, p, faces }];
  });
  const each = arrays.length;
  shown.forEach(({ name }, i) => {
    const colour = values === null ? '' : `,"COLOR_0":${each * i + 2}`;
    const attributes = `{"POSITION":${each * i},"NORMAL":${each * i + 1}${colour}}`;
    const extras = `{"patch":${JSON.stringify(name)}}`;
    json.add(
      `${i === 0 ? '' : ','}{"attributes":${attributes},"indices":${each * (i + 1) - 1},"material":${i},"extras":${extras}}`,
    );
  });
  json.add(`],"extras":${JSON.stringify(describeColours(colourBy, values))}}],"materials":[`);
  shown.forEach(({ name, p }, i) => {
    const [r, g, b] = values === null ? patchColour(p) : [1, 1, 1];
    const material = {
      name,
      pbrMetallicRoughness: { baseColorFactor: [r, g, b, 1], metallicFactor: 0, roughnessFactor: 0.7 },
    };
    json.add(`${i === 0 ? '' : ','}${JSON.stringify(material)}`);
  });
  json.add('],"accessors":[');
  shown.forEach(({ p, faces }, i) => {
    const from = parts.vertexStart[p]!;
    const count = parts.vertexStart[p + 1]! - from;
    const { min, max } = boundsOf(position, from, from + count);
    const three = { componentType: FLOAT, count, type: 'VEC3' };
    const list: object[] = [
      { bufferView: 0, byteOffset: 12 * from, ...three, min, max },
      { bufferView: 1, byteOffset: 12 * from, ...three },
    ];
    if (values !== null) {
      const colour = { componentType: UNSIGNED_SHORT, normalized: true, count, type: 'VEC4' };
      list.push({ bufferView: 2, byteOffset: 8 * from, ...colour });
    }
    const place = 12 * parts.triangleStart[p]!;
    const corners = { componentType: UNSIGNED_INT, count: 3 * faces, type: 'SCALAR' };
    list.push({ bufferView: each - 1, byteOffset: place, ...corners });
    json.add(`${i === 0 ? '' : ','}${list.map((accessor) => JSON.stringify(accessor)).join(',')}`);
  });
  let size = 0;
  const views = arrays.map(({ data, stride, target }) => {
    const view = { buffer: 0, byteOffset: size, byteLength: data.byteLength, target };
    size += data.byteLength;
    return stride === null ? view : { ...view, byteStride: stride };
  });
  json.add(`],"bufferViews":${JSON.stringify(views)},"buffers":[{"byteLength":${size}}]}`);
  return container(
    json.bytes(),
    arrays.map(({ data }) => data),
    size,
  );
}

interface BinaryArray {
  /** Whole words of 4 bytes. */
  readonly data: Float32Array | Uint16Array | Uint32Array;
  /** Bytes from one to the next, of what belongs to corners. */
  readonly stride: number | null;
  readonly target: number;
}

function quantityOf(surface: MeshSurface, colourBy: ColourBy): Float64Array | null {
  if (colourBy === 'patch') return null;
  const values = colourBy === 'pressure' ? surface.pressure : surface.wallShear;
  if (values !== null) return values;
  throw inputError('no-flow', 'colourBy', `got ${colourBy}, which this surface does not hold, expected patch`);
}

/** (4 corners) red, green, blue and a full alpha, in 65,535ths. */
function cornerColours(values: Float64Array, vertex: Int32Array): Uint16Array {
  const { low, high } = rangeOf(values);
  const spread = high > low ? high - low : 1;
  const colours = new Uint16Array(4 * vertex.length);
  for (let i = 0; i < vertex.length; i++) {
    const colour = scaleColour((values[vertex[i]!]! - low) / spread);
    for (let k = 0; k < 3; k++) colours[4 * i + k] = Math.round(65_535 * colour[k]!);
    colours[4 * i + 3] = 65_535;
  }
  return colours;
}

function describeColours(colourBy: ColourBy, values: Float64Array | null): object {
  const unit = { length_unit: 'm' };
  if (values === null) return { ...unit, colour_by: colourBy };
  const { low, high } = rangeOf(values);
  return { ...unit, colour_by: colourBy, low_Pa: low, high_Pa: high };
}

function rangeOf(values: Float64Array): { readonly low: number; readonly high: number } {
  let low = Infinity;
  let high = -Infinity;
  for (const x of values) {
    if (x < low) low = x;
    if (x > high) high = x;
  }
  return { low, high };
}

/** Least and greatest of each coordinate; float32, which JSON's numbers hold exactly. */
function boundsOf(
  position: Float32Array,
  from: number,
  to: number,
): { readonly min: number[]; readonly max: number[] } {
  const min = [Infinity, Infinity, Infinity];
  const max = [-Infinity, -Infinity, -Infinity];
  for (let i = from; i < to; i++) {
    for (let k = 0; k < 3; k++) {
      const x = position[3 * i + k]!;
      if (x < min[k]!) min[k] = x;
      if (x > max[k]!) max[k] = x;
    }
  }
  return { min, max };
}

const IS_LITTLE = new Uint8Array(Uint32Array.of(1).buffer)[0] === 1;

/** A GLB of a text and the arrays of its one buffer. */
function container(json: Uint8Array, arrays: readonly ArrayBufferView[], size: number): Uint8Array {
  if (!IS_LITTLE) throw new InvariantError('encodeGlb: this machine stores numbers with the high byte first');
  const text = 4 * Math.ceil(json.length / 4);
  const total = 12 + 8 + text + 8 + size;
  if (total > MOST_BYTES)
    throw inputError('too-large', 'lumen.glb', `got a file of ${total} bytes, expected at most ${MOST_BYTES}`);
  const bytes = new Uint8Array(total);
  const view = new DataView(bytes.buffer);
  const words = (at: number, ...list: readonly number[]) => {
    for (const [i, word] of list.entries()) view.setUint32(at + 4 * i, word, true);
  };
  // `glTF`, version; then length and kind of each chunk: `JSON`, `BIN`.
  words(0, 0x46546c67, 2, total, text, 0x4e4f534a);
  bytes.fill(0x20, 20, 20 + text);
  bytes.set(json, 20);
  words(20 + text, size, 0x004e4942);
  let at = 28 + text;
  for (const array of arrays) {
    bytes.set(new Uint8Array(array.buffer, array.byteOffset, array.byteLength), at);
    at += array.byteLength;
  }
  return bytes;
}

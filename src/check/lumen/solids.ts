import { type Fault, InputError, inputError } from '../../core/errors.ts';
import { decodeText } from '../../core/text.ts';

/** Triangles as a file lists them: corners one by one, with the named solid each belongs to. */
export interface Solids {
  /** (9f) corner coordinates, in the file's unit. */
  readonly corner: Float64Array;
  /** (f) index into `names`. */
  readonly solid: Int32Array;
  /** In the file's order; a name that comes twice is listed twice. */
  readonly names: readonly string[];
}

/** Faults listed before reading stops. */
const MOST_FAULTS = 20;

/**
 * Reads an STL: text with one or more named solids, or binary with the solid's number in the attribute word.
 *
 * @param file       name for messages
 * @param solidNames names of a binary file's solids by number
 * @throws InputError naming the lines that are broken
 * Source: de-facto standard of 1989, layout confirmed with an independent writer.
 */
export function readSolids(file: string, bytes: Uint8Array, solidNames: readonly string[]): Solids {
  if (!isBinary(bytes)) return readText(file, bytes);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  return readBinary(file, view, view.getUint32(80, true), solidNames);
}

/** Whether an STL is binary: its length is what its count says. */
export function isBinary(bytes: Uint8Array): boolean {
  if (bytes.length < 84) return false;
  return bytes.length === 84 + 50 * new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength).getUint32(80, true);
}

function readBinary(file: string, view: DataView, count: number, solidNames: readonly string[]): Solids {
  const corner = new Float64Array(9 * count);
  const solid = new Int32Array(count);
  for (let f = 0; f < count; f++) {
    const at = 84 + 50 * f;
    for (let k = 0; k < 9; k++) {
      const x = view.getFloat32(at + 12 + 4 * k, true);
      if (!Number.isFinite(x))
        throw inputError('not-finite', file, `triangle ${f}: got ${x}, expected a finite number`);
      corner[9 * f + k] = x;
    }
    solid[f] = view.getUint16(at + 48, true);
    if (solid[f]! >= solidNames.length) {
      throw inputError('unknown-patch', file, `triangle ${f}: patch ${solid[f]}, expected below ${solidNames.length}`);
    }
  }
  return { corner, solid, names: solidNames };
}

function readText(file: string, bytes: Uint8Array): Solids {
  const faults: Fault[] = [];
  const fault = (line: number, message: string) => {
    faults.push({ code: 'bad-stl', where: `${file}:${line}`, message });
    if (faults.length >= MOST_FAULTS) throw new InputError(faults);
  };
  let corner = new Float64Array(9 * 1024);
  const solid: number[] = [];
  const names: string[] = [];
  let corners = 0;
  let inFacet = false;
  let inSolid = false;
  let line = 0;
  for (const text of eachLine(bytes)) {
    line++;
    const words = text.trim().split(/\s+/);
    switch (words[0]) {
      case '':
        break;
      case 'solid':
        if (inSolid) fault(line, 'got a solid inside a solid, expected endsolid first');
        inSolid = true;
        names.push(words.slice(1).join(' '));
        break;
      case 'endsolid':
        if (!inSolid || inFacet) fault(line, `got endsolid ${inFacet ? 'inside a facet' : 'without solid'}`);
        inSolid = false;
        break;
      case 'facet':
        if (!inSolid || inFacet) fault(line, `got a facet ${inFacet ? 'inside a facet' : 'outside a solid'}`);
        inFacet = true;
        corners = 0;
        if (9 * solid.length + 9 > corner.length) {
          const wider = new Float64Array(2 * corner.length);
          wider.set(corner);
          corner = wider;
        }
        break;
      case 'vertex': {
        const at = 9 * solid.length + 3 * corners++;
        if (!inFacet || corners > 3 || words.length !== 4) {
          fault(line, `got "${text.trim()}", expected three corners of three numbers in each facet`);
          break;
        }
        for (let k = 0; k < 3; k++) {
          const x = Number(words[k + 1]);
          if (!Number.isFinite(x)) fault(line, `got ${words[k + 1]}, expected a finite number`);
          corner[at + k] = x;
        }
        break;
      }
      case 'endfacet':
        if (!inFacet || corners !== 3) fault(line, `got endfacet after ${corners} corners, expected 3`);
        inFacet = false;
        solid.push(names.length - 1);
        break;
      case 'outer':
      case 'endloop':
        break;
      default:
        fault(line, `got "${text.trim().slice(0, 40)}", expected a line of an ASCII STL`);
    }
  }
  if (inSolid) fault(line, 'the file ends inside a solid');
  if (names.length === 0) fault(Math.max(1, line), 'no solid in the file');
  if (faults.length > 0) throw new InputError(faults);
  return { corner: corner.slice(0, 9 * solid.length), solid: Int32Array.from(solid), names };
}

/** Lines of a text of any size, decoded piece by piece. */
export function* eachLine(bytes: Uint8Array): Generator<string> {
  const piece = 1 << 24;
  let from = 0;
  while (from < bytes.length) {
    let to = Math.min(from + piece, bytes.length);
    while (to < bytes.length && bytes[to - 1] !== 10) to++;
    const lines = decodeText(bytes.subarray(from, to)).split('\n');
    if (lines.at(-1) === '') lines.pop();
    yield* lines;
    from = to;
  }
}

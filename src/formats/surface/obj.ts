import { inputError } from '../../core/errors.ts';
import type { TriangleSurface } from '../../core/surface.ts';
import { mergeCorners } from './corners.ts';
import { PolygonFans } from './polygons.ts';
import { quoted, TextReader } from './text-reader.ts';

/** Statements of the format that say nothing about a surface of flat faces. */
const IGNORED = new Set(
  'vn vt vp g o s mg usemtl mtllib usemap maplib l p bevel c_interp d_interp lod shadow_obj trace_obj call csh'.split(
    ' ',
  ),
);
/** Statements that make surfaces we do not read. */
const CURVED = new Set('cstype deg bmat step curv curv2 surf parm trim hole scrv sp end con ctech stech'.split(' '));

/**
 * Reads Wavefront OBJ: `v` and `f` (positive or negative rows, `v/vt/vn` in any form, polygons split in fans). Other
 * statements of the format are passed over, free-form surfaces refused.
 *
 * @param file named in messages
 * @returns    coordinates in the file's own unit
 * @throws  InputError naming the line: unknown statement, too few numbers, not finite, row out of range, no faces
 */
export function decodeObj(bytes: Uint8Array, file: string): TriangleSurface {
  if (bytes.length === 0) throw inputError('empty-surface', file, 'got an empty file, expected OBJ');
  const reader = new TextReader(bytes, file, bytes[0] === 0xef && bytes[1] === 0xbb && bytes[2] === 0xbf ? 3 : 0);
  const corner: number[] = [];
  const fans = new PolygonFans();
  /** Next word of the statement, over lines joined with a backslash. */
  const next = (): string => {
    for (;;) {
      const word = reader.wordOfLine();
      if (word === '\\') reader.skipLine();
      else return word.startsWith('#') ? '' : word;
    }
  };
  let faceLine = 0;
  let highest = -1;
  while (!reader.ended) {
    const word = next();
    if (word === 'v') {
      for (const axis of ['x', 'y', 'z']) corner.push(reader.real(next(), axis));
    } else if (word === 'f') {
      for (let item = next(); item !== ''; item = next()) {
        const row = cornerRow(reader, item, corner.length / 3);
        if (row > highest) {
          highest = row;
          faceLine = reader.line;
        }
        fans.corner(row);
      }
      const corners = fans.close();
      if (corners < 3) throw reader.fault('bad-face', `got a face of ${corners} corners, expected at least 3`);
    } else if (CURVED.has(word))
      throw reader.fault('not-supported', `got ${quoted(word)}, a free-form surface, expected flat faces ("v", "f")`);
    else if (word !== '' && !IGNORED.has(word))
      throw reader.fault('bad-syntax', `got ${quoted(word)}, expected an OBJ statement ("v", "f", …)`);
    reader.skipLine();
  }
  if (fans.triangle.length === 0)
    throw inputError('empty-surface', file, 'got an empty surface without faces, expected some');
  // Faces may name corners that come later in the file.
  if (highest >= corner.length / 3)
    throw inputError(
      'bad-index',
      `${file}:${faceLine}`,
      `got corner ${highest + 1}, expected 1 to ${corner.length / 3}`,
    );
  return mergeCorners(corner, fans.triangle);
}

/** Row from 0 of `7`, `7/1`, `7//3`, `-1`, … */
function cornerRow(reader: TextReader, item: string, known: number): number {
  const slash = item.indexOf('/');
  const value = reader.integer(slash < 0 ? item : item.slice(0, slash), 'a corner');
  const row = value < 0 ? known + value : value - 1;
  if (value === 0 || row < 0)
    throw reader.fault('bad-index', `got corner ${value}, expected 1 to ${known} (or −${known} to −1)`);
  return row;
}

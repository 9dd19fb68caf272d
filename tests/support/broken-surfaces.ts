import type { TriangleSurface } from '../../src/core/surface.ts';
import { joined, objText, plyBinary, plyHeader, plyText, stlBinary, stlText, text } from './surface-files.ts';
import {
  ball,
  bean,
  cube,
  flipped,
  insideOut,
  moved,
  notchedCube,
  surfaceOf,
  together,
  torus,
  without,
  withTriangle,
} from './surfaces.ts';

/** A surface file with something wrong, and a word its refusal must say. */
export interface BrokenSurface {
  readonly name: string;
  readonly extension: '.stl' | '.ply' | '.obj';
  readonly bytes: Uint8Array;
  readonly expected: RegExp;
}

const good = ball(1);
const shifted = (surface: TriangleSurface, dx: number): TriangleSurface =>
  moved(surface, ([x, y, z]) => [x + dx, y, z]);
const scaled = (surface: TriangleSurface, k: number): TriangleSurface =>
  moved(surface, ([x, y, z]) => [k * x, k * y, k * z]);

/** The lines of a text file with line `at` (from 0, negative from the end) put in place of another. */
function line(content: string, at: number, instead: string): string {
  const lines = content.split('\n');
  lines[at < 0 ? lines.length + at : at] = instead;
  return lines.join('\n');
}

function cut(bytes: Uint8Array, share: number): Uint8Array {
  return bytes.slice(0, Math.floor(bytes.length * share));
}

function noise(length: number): Uint8Array {
  let state = 12345;
  return Uint8Array.from({ length }, () => {
    state = (Math.imul(state, 1103515245) + 12345) >>> 0;
    return state >>> 24;
  });
}

/** Binary STL with one float put in place of another. */
function stlWith(value: number, at: number): Uint8Array {
  const bytes = stlBinary(good);
  new DataView(bytes.buffer).setFloat32(at, value, true);
  return bytes;
}

/** One corner of the ball pulled out through the far side. */
function pulledThrough(): TriangleSurface {
  const position = good.position.slice();
  position.set([-3, 0.1, 0.2], 0);
  return { position, triangle: good.triangle };
}

/** Two tetrahedra that share one corner. */
function hourglass(): TriangleSurface {
  return surfaceOf(
    [
      [0, 0, 0],
      [1, 0, 1],
      [-1, 1, 1],
      [-1, -1, 1],
      [1, 0, -1],
      [-1, 1, -1],
      [-1, -1, -1],
    ],
    [
      [0, 2, 1],
      [0, 3, 2],
      [0, 1, 3],
      [1, 2, 3],
      [0, 4, 5],
      [0, 5, 6],
      [0, 6, 4],
      [4, 6, 5],
    ],
  );
}

/** Two tetrahedra that share one edge: four triangles meet there. */
function hinge(): TriangleSurface {
  return surfaceOf(
    [
      [0, 0, 0],
      [0, 0, 1],
      [1, -1, 0.5],
      [1, 1, 0.5],
      [-1, -1, 0.5],
      [-1, 1, 0.5],
    ],
    [
      [0, 1, 2],
      [0, 3, 1],
      [0, 2, 3],
      [1, 3, 2],
      [0, 4, 1],
      [0, 1, 5],
      [0, 5, 4],
      [1, 4, 5],
    ],
  );
}

/** Shapes that no tissue can have, each written in all three formats. */
const shapes: readonly (readonly [string, TriangleSurface, RegExp])[] = [
  ['open ball', without(good, 5), /open/],
  ['open cube without its top', without(without(cube(), 2), 2), /open/],
  [
    'single triangle',
    surfaceOf(
      [
        [0, 0, 0],
        [1, 0, 0],
        [0, 1, 0],
      ],
      [[0, 1, 2]],
    ),
    /open/,
  ],
  ['flipped triangle', flipped(good, 7), /orientation/],
  ['half of the ball flipped', good.triangle.length > 0 ? flippedHalf(good) : good, /orientation/],
  ['inside out ball', insideOut(good), /inside out/],
  ['inside out torus', insideOut(torus(2, 0.5, 12, 8)), /inside out/],
  ['two balls crossing', together(good, shifted(good, 0.9)), /cross/],
  ['torus that crosses itself', torus(0.5, 0.8, 16, 12), /cross/],
  ['corner pulled through', pulledThrough(), /cross/],
  [
    'two cubes with a common part of a face',
    together(
      cube(),
      moved(cube(), ([x, y, z]) => [x + 1, 0.5 * y + 0.25, 0.5 * z + 0.25]),
    ),
    /touch/,
  ],
  [
    'two cubes in line that overlap',
    together(
      cube(),
      moved(cube(), ([x, y, z]) => [x + 0.5, y, z]),
    ),
    /cross/,
  ],
  ['hourglass', hourglass(), /non-manifold corner/],
  ['hinge', hinge(), /non-manifold edge/],
  ['fin on a ball', withTriangle(good, [0, 2, 1]), /non-manifold|open/],
  ['ball in a ball, both outward', together(good, scaled(good, 0.5)), /inside another piece/],
  ['ball turned inwards beside a ball', together(good, shifted(insideOut(scaled(good, 0.5)), 4)), /inside out/],
  ['triangle with two equal corners', withTriangle(good, [3, 3, 4]), /degenerate/],
  [
    'corners in a line',
    surfaceOf(
      [
        [0, 0, 0],
        [1, 0, 0],
        [2, 0, 0],
        [1, 1, 1],
      ],
      [
        [0, 1, 2],
        [0, 3, 1],
        [1, 3, 2],
        [0, 2, 3],
      ],
    ),
    /degenerate/,
  ],
  [
    'flat two-sided sheet',
    surfaceOf(
      [
        [0, 0, 0],
        [1, 0, 0],
        [0, 1, 0],
      ],
      [
        [0, 1, 2],
        [0, 2, 1],
      ],
    ),
    /cross|touch/,
  ],
];

function flippedHalf(surface: TriangleSurface): TriangleSurface {
  let out = surface;
  for (let t = 0; t < surface.triangle.length / 6; t++) out = flipped(out, t);
  return out;
}

const stl = stlText(good);
const ply = plyText(good);
const obj = objText(good);
const vertexLine = 10;

/** Files that do not hold what their format promises. */
const files: readonly (readonly [string, BrokenSurface['extension'], Uint8Array, RegExp])[] = [
  ['empty', '.stl', new Uint8Array(0), /empty/],
  ['empty', '.ply', new Uint8Array(0), /empty/],
  ['empty', '.obj', new Uint8Array(0), /empty/],
  ['blank lines only', '.obj', text('\n\n \n'), /empty/],
  ['comments only', '.obj', text('# nothing\n# at all\n'), /empty/],
  ['noise', '.stl', noise(5000), /truncated/],
  ['noise', '.ply', noise(5000), /no "ply"/],
  ['noise', '.obj', noise(5000), /an OBJ statement/],
  ['few bytes', '.stl', text('so'), /does not start with "solid"/],
  ['ASCII cut off in a facet', '.stl', cut(text(stl), 0.61), /:139: got "v", expected "vertex"/],
  ['ASCII without endsolid', '.stl', text(stl.slice(0, stl.lastIndexOf('endsolid'))), /truncated/],
  ['ASCII with no facets', '.stl', text('solid nothing\nendsolid nothing\n'), /empty/],
  ['ASCII with NaN', '.stl', text(stl.replace(/vertex \S+/, 'vertex nan')), /nan/i],
  ['ASCII with infinity', '.stl', text(stl.replace(/vertex \S+/, 'vertex inf')), /finite/],
  ['ASCII with a number too large', '.stl', text(stl.replace(/vertex \S+/, 'vertex 1e999')), /finite/],
  ['ASCII with a word for a number', '.stl', text(stl.replace(/vertex \S+/, 'vertex one')), /number/],
  ['ASCII with a missing number', '.stl', text(stl.replace(/vertex \S+/, 'vertex')), /expected a number for z/],
  ['ASCII with four corners', '.stl', text(stl.replace('endloop', 'vertex 0 0 0\nendloop')), /endloop/],
  ['ASCII with words left over', '.stl', text(`${stl}and more`), /"solid" or the end/],
  ['binary cut off', '.stl', cut(stlBinary(good), 0.5), /truncated/],
  ['binary cut off in its header', '.stl', stlBinary(good).slice(0, 60), /60 bytes.*at least 84/],
  ['binary that starts with solid, cut off', '.stl', cut(stlBinary(good, 'solid as it seems'), 0.7), /truncated/],
  ['binary with bytes left over', '.stl', joined(stlBinary(good), new Uint8Array(7)), /left over/],
  ['binary that counts none', '.stl', stlBinary(surfaceOf([], [])), /empty/],
  ['binary that counts too many', '.stl', stlBinary(good, '', 33), /truncated/],
  ['binary that counts four thousand million', '.stl', stlBinary(good, '', 0xffffffff), /truncated/],
  ['binary with NaN', '.stl', stlWith(Number.NaN, 84 + 12), /NaN/],
  ['binary with infinity', '.stl', stlWith(Number.POSITIVE_INFINITY, 84 + 50 + 20), /finite/],
  ['text of another kind', '.stl', text(obj), /does not start with "solid"/],
  ['no magic word', '.ply', text(ply.slice(4)), /ply/],
  ['unknown format', '.ply', text(ply.replace('ascii', 'base64')), /format/],
  ['no format line', '.ply', text(line(ply, 1, 'comment')), /format/],
  ['header without end', '.ply', text(ply.slice(0, ply.indexOf('end_header'))), /truncated/],
  ['unknown property type', '.ply', text(ply.replace('double x', 'quad x')), /type/],
  ['no z', '.ply', text(ply.replace('double z', 'double w')), /"z"/],
  ['no corner list', '.ply', text(ply.replace('vertex_indices', 'colours')), /vertex_indices/],
  [
    'no vertices',
    '.ply',
    text('ply\nformat ascii 1.0\nelement face 1\nproperty list uchar int vertex_indices\nend_header\n3 0 1 2\n'),
    /no element "vertex"/,
  ],
  [
    'element without properties, counted in millions of millions',
    '.ply',
    text(`ply\nformat ascii 1.0\nelement dust 900000000000000\nend_header\n`),
    /without properties/,
  ],
  [
    'vertices counted in millions of millions',
    '.ply',
    text(ply.replace(/vertex \d+/, 'vertex 900000000000000')),
    /truncated/,
  ],
  [
    'faces counted in thousands of millions',
    '.ply',
    joined(text(plyHeader('binary_little_endian', 0, 4000000000))),
    /truncated/,
  ],
  ['negative count', '.ply', text(ply.replace(/vertex \d+/, 'vertex -5')), /got -5 of element/],
  [
    'a vertex too few',
    '.ply',
    text(
      ply
        .split('\n')
        .filter((_, i) => i !== vertexLine)
        .join('\n'),
    ),
    /got nothing, expected the length/,
  ],
  ['cut off', '.ply', cut(text(ply), 0.7), /0 bytes left, expected 32 of element "face"/],
  ['NaN', '.ply', text(line(ply, vertexLine, 'nan 0 0')), /nan/i],
  ['face of two corners', '.ply', text(line(ply, -2, '2 0 1')), /corners/],
  ['corner out of range', '.ply', text(line(ply, -2, '3 0 1 18')), /corner 18/],
  ['negative corner', '.ply', text(line(ply, -2, '3 0 1 -1')), /corner -1/],
  ['list longer than the file', '.ply', text(line(ply, -2, '1000000000 0 1 2')), /truncated/],
  ['binary cut off', '.ply', cut(plyBinary(good, true), 0.8), /truncated/],
  [
    'binary of the other byte order',
    '.ply',
    joined(
      text(plyHeader('binary_big_endian', 18, 32)),
      plyBinary(good, true).slice(plyHeader('binary_little_endian', 18, 32).length),
    ),
    /corner \d+ in face 0/,
  ],
  ['no faces', '.ply', text(`${plyHeader('ascii', 1, 0)}0 0 0\n`), /empty/],
  [
    'triangle strips',
    '.ply',
    text(`${plyHeader('ascii', 1, 0).replace('face 0', 'tristrips 1')}0 0 0\n3 0 0 0\n`),
    /strips/,
  ],
  ['vertices only', '.obj', text(obj.slice(0, obj.indexOf('\nf '))), /empty/],
  ['corner out of range', '.obj', text(line(obj, -2, 'f 1 2 19')), /corner 19/],
  ['corner nought', '.obj', text(line(obj, -2, 'f 0 1 2')), /corner 0/],
  ['negative corner out of range', '.obj', text(line(obj, -2, 'f -1 -2 -19')), /corner -19/],
  ['face of two corners', '.obj', text(line(obj, -2, 'f 1 2')), /corners/],
  ['fraction for a corner', '.obj', text(line(obj, -2, 'f 1 2 3.5')), /whole number/],
  ['NaN', '.obj', text(line(obj, 1, 'v nan 0 0')), /nan/i],
  ['two coordinates', '.obj', text(line(obj, 1, 'v 0 0')), /got nothing, expected z/],
  ['unknown statement', '.obj', text(line(obj, 1, 'vertex 0 0 0')), /got "vertex", expected an OBJ statement/],
  ['huge coordinate', '.obj', text(line(obj, 1, 'v 1e30 0 0')), /at most/],
  ['huge coordinate', '.stl', stlWith(3e38, 84 + 12), /at most/],
  ['free-form surface', '.obj', text(`${obj}cstype bezier\n`), /free-form/],
  ['cut off in a face', '.obj', text(obj.slice(0, obj.lastIndexOf(' '))), /corners|open/],
];

/** Every broken file: at least 60, names unique together with the extension. */
export const BROKEN_SURFACES: readonly BrokenSurface[] = [
  ...shapes.flatMap(([name, surface, expected]): BrokenSurface[] => [
    { name, extension: '.stl', bytes: stlBinary(surface), expected },
    { name, extension: '.ply', bytes: plyBinary(surface, false), expected },
    { name, extension: '.obj', bytes: text(objText(surface)), expected },
  ]),
  ...files.map(([name, extension, bytes, expected]): BrokenSurface => ({ name, extension, bytes, expected })),
];

/** Surfaces that must pass, in the same formats. */
export const SOUND_SURFACES: readonly (readonly [string, TriangleSurface])[] = [
  ['cube', cube()],
  ['notched cube', notchedCube()],
  ['ball', ball(2)],
  ['bean', bean(2)],
  ['torus', torus(2, 0.5, 24, 12)],
  ['ball with a hollow', together(ball(2), insideOut(scaled(ball(2), 0.5)))],
  ['two balls apart', together(ball(1), shifted(ball(1), 3))],
];

import type { VolumeCells } from './volume-file.ts';

/** Faces of a volume mesh that one cell alone has. */
export interface OuterFaces {
  readonly count: number;
  /** (4 count) corners, counter-clockwise seen from outside; −1 for the fourth of a triangle. */
  readonly corner: Int32Array;
  /** (count) the cell. */
  readonly cell: Int32Array;
}

/**
 * Finds the faces that one cell alone has.
 *
 * @param misfit told of each cell whose face more than two cells have, or another that runs it the same way or cuts it
 *               otherwise
 * Cost:  O(cells) by hashing
 */
export function findOuterFaces(volume: VolumeCells, misfit: (cell: number) => void): OuterFaces {
  const { cells, kind, start, corner } = volume;
  let faces = 0;
  for (const one of kind) faces += one.faces.length;
  let size = 16;
  while (size < 2 * faces) size *= 2;
  const head = new Int32Array(size).fill(-1);
  const next = new Int32Array(faces);
  const run = new Int32Array(4 * faces);
  const owner = new Int32Array(faces);
  const met = new Uint8Array(faces);
  let count = 0;
  for (let c = 0; c < cells; c++) {
    for (const face of kind[c]!.faces) {
      const f = count++;
      owner[f] = c;
      // From the least corner on.
      let first = 0;
      for (let k = 1; k < face.length; k++)
        if (corner[start[c]! + face[k]!]! < corner[start[c]! + face[first]!]!) first = k;
      for (let k = 0; k < face.length; k++) run[4 * f + k] = corner[start[c]! + face[(first + k) % face.length]!]!;
      if (face.length === 3) run[4 * f + 3] = -1;
      const sum = run[4 * f]! + run[4 * f + 1]! + run[4 * f + 2]! + run[4 * f + 3]!;
      const hash = Math.imul(run[4 * f]! + 1, 0x9e3779b1) ^ Math.imul(sum, 0x85ebca6b);
      const slot = (hash ^ (hash >>> 15)) & (size - 1);
      let other = head[slot]!;
      while (other >= 0 && !sameCorners(run, f, other)) other = next[other]!;
      if (other < 0) {
        next[f] = head[slot]!;
        head[slot] = f;
        continue;
      }
      met[f] = 1;
      if (met[other]! > 0 || !opposite(run, f, other)) misfit(c);
      met[other] = 1;
    }
  }
  const outer: number[] = [];
  for (let f = 0; f < faces; f++) if (met[f] === 0) outer.push(f);
  return {
    count: outer.length,
    corner: Int32Array.from(outer.flatMap((f) => [...run.subarray(4 * f, 4 * f + 4)])),
    cell: Int32Array.from(outer, (f) => owner[f]!),
  };
}

/** Whether two faces have the same corners, in any order. */
function sameCorners(run: Int32Array, f: number, g: number): boolean {
  if (run[4 * f] !== run[4 * g]) return false;
  for (let k = 1; k < 4; k++) {
    const v = run[4 * f + k]!;
    if (v !== run[4 * g + 1] && v !== run[4 * g + 2] && v !== run[4 * g + 3]) return false;
  }
  return true;
}

/** Whether two faces of the same corners are run in opposite ways. */
function opposite(run: Int32Array, f: number, g: number): boolean {
  if (run[4 * f + 3]! < 0) return run[4 * f + 1] === run[4 * g + 2];
  return run[4 * f + 1] === run[4 * g + 3] && run[4 * f + 2] === run[4 * g + 2];
}

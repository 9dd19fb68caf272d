import type { Tally } from '../result.ts';
import type { Solids } from './solids.ts';
import { type Welded, weldCorners } from './weld.ts';

/** The surface that other files must repeat, ready to be looked up. */
export class Reference {
  readonly #mesh: Welded;
  readonly #solids: Solids;
  readonly #grid: PointGrid;
  /** Triangles by the hash of their corners. */
  readonly #head: Int32Array;
  readonly #next: Int32Array;

  /**
   * @param solids   m
   * @param slack    m, how far a corner may be off: the precision that the files are printed with
   */
  constructor(mesh: Welded, solids: Solids, slack: number) {
    this.#mesh = mesh;
    this.#solids = solids;
    this.#grid = new PointGrid(mesh.position, slack);
    const faces = mesh.triangle.length / 3;
    this.#head = new Int32Array(powerAbove(faces)).fill(-1);
    this.#next = new Int32Array(faces);
    for (let f = faces - 1; f >= 0; f--) {
      const slot = this.#slot(mesh.triangle[3 * f]!, mesh.triangle[3 * f + 1]!, mesh.triangle[3 * f + 2]!);
      this.#next[f] = this.#head[slot]!;
      this.#head[slot] = f;
    }
  }

  /**
   * Looks for every triangle of a file, in any order, and each triangle of the reference that no file's triangle is.
   *
   * @param twin    m
   * @param patches whether the patches must be the same too
   */
  compare(file: string, twin: Solids, patches: boolean, tally: Tally): void {
    const { triangle } = this.#mesh;
    const faces = triangle.length / 3;
    const found = new Uint8Array(faces);
    const welded = weldCorners(twin);
    const vertex = new Int32Array(welded.position.length / 3);
    for (let v = 0; v < vertex.length; v++) vertex[v] = this.#grid.find(welded.position, v);
    const others = welded.triangle.length / 3;
    if (others !== faces) {
      const message = `${file} has ${others} triangles, lumen.stl ${faces}`;
      tally.fail(file, -1, Math.abs(others - faces), 0, message);
    }
    for (let f = 0; f < others; f++) {
      tally.checked++;
      const [a, b, c] = [0, 1, 2].map((k) => vertex[welded.triangle[3 * f + k]!]!) as [number, number, number];
      const match = a < 0 || b < 0 || c < 0 ? -1 : this.#match(a, b, c, found);
      if (match < 0) {
        const place = [0, 1, 2].map((k) => twin.corner[9 * f + k]!.toPrecision(9)).join(', ');
        const message = `triangle ${f} of ${file}, with a corner at (${place}) m, is not in lumen.stl`;
        tally.fail(`${file}:${f}`, f, 1, 0, message);
        continue;
      }
      found[match] = 1;
      const name = twin.names[twin.solid[f]!]!;
      const wanted = this.#solids.names[this.#solids.solid[match]!]!;
      if (patches && name !== wanted) {
        const message = `triangle ${f} of ${file} has patch ${name}, in lumen.stl ${wanted}`;
        tally.fail(`${file}:${f}`, f, 1, 0, message);
      }
    }
    for (let f = 0; f < faces; f++) {
      if (found[f] === 0) tally.fail(`${file}`, f, 1, 0, `triangle ${f} of lumen.stl is not in ${file}`);
    }
  }

  /** A triangle not found before that has these corners in this turn, or −1. */
  #match(a: number, b: number, c: number, found: Uint8Array): number {
    const { triangle } = this.#mesh;
    for (let f = this.#head[this.#slot(a, b, c)]!; f >= 0; f = this.#next[f]!) {
      if (found[f] === 1) continue;
      const [x, y, z] = [triangle[3 * f]!, triangle[3 * f + 1]!, triangle[3 * f + 2]!];
      if ((x === a && y === b && z === c) || (x === b && y === c && z === a) || (x === c && y === a && z === b))
        return f;
    }
    return -1;
  }

  #slot(a: number, b: number, c: number): number {
    // The same for every turn and order of the corners.
    const mixed = Math.imul(a + 1, 0x9e3779b1) + Math.imul(b + 1, 0x9e3779b1) + Math.imul(c + 1, 0x9e3779b1);
    const square = Math.imul(a, a) + Math.imul(b, b) + Math.imul(c, c);
    const hash = Math.imul(mixed ^ (square >>> 7) ^ square, 0x85ebca6b);
    return (hash ^ (hash >>> 15)) & (this.#head.length - 1);
  }
}

/** Points to be found again within a slack, by a hashed grid of cells a few slacks wide. */
class PointGrid {
  readonly #position: Float64Array;
  readonly #slack: number;
  readonly #cell: number;
  readonly #head: Int32Array;
  readonly #next: Int32Array;

  constructor(position: Float64Array, slack: number) {
    this.#position = position;
    this.#slack = slack;
    this.#cell = slack > 0 ? 8 * slack : 1;
    const count = position.length / 3;
    this.#head = new Int32Array(powerAbove(count)).fill(-1);
    this.#next = new Int32Array(count);
    const at = (v: number, k: number) => Math.floor(position[3 * v + k]! / this.#cell);
    for (let v = count - 1; v >= 0; v--) {
      const slot = this.#slot(at(v, 0), at(v, 1), at(v, 2));
      this.#next[v] = this.#head[slot]!;
      this.#head[slot] = v;
    }
  }

  /** The nearest point whose every coordinate is within the slack, or −1. */
  find(other: Float64Array, v: number): number {
    const p = this.#position;
    const [x, y, z] = [other[3 * v]!, other[3 * v + 1]!, other[3 * v + 2]!];
    const low = (t: number) => Math.floor((t - this.#slack) / this.#cell);
    const high = (t: number) => Math.floor((t + this.#slack) / this.#cell);
    let best = -1;
    let least = Infinity;
    for (let i = low(x); i <= high(x); i++) {
      for (let j = low(y); j <= high(y); j++) {
        for (let k = low(z); k <= high(z); k++) {
          for (let u = this.#head[this.#slot(i, j, k)]!; u >= 0; u = this.#next[u]!) {
            const off = Math.max(Math.abs(p[3 * u]! - x), Math.abs(p[3 * u + 1]! - y), Math.abs(p[3 * u + 2]! - z));
            if (off <= this.#slack && off < least) {
              best = u;
              least = off;
            }
          }
        }
      }
    }
    return best;
  }

  #slot(i: number, j: number, k: number): number {
    // Cell numbers may pass 2^31; imul takes them modulo 2^32, which is as good.
    const hash = Math.imul(i, 0x9e3779b1) ^ Math.imul(j, 0x85ebca6b) ^ Math.imul(k, 0xc2b2ae35);
    return (hash ^ (hash >>> 15)) & (this.#head.length - 1);
  }
}

function powerAbove(count: number): number {
  let size = 16;
  while (size < 2 * count) size *= 2;
  return size;
}

/** How far corners of two files may be apart: nine digits of text, or a float32, of the largest coordinate. */
export function printedSlack(position: Float64Array, binary: boolean): number {
  let largest = 0;
  for (const x of position) largest = Math.max(largest, Math.abs(x));
  return (binary ? 1.2e-7 : 1.2e-8) * largest;
}

import type { Forest } from '../tree/forest.ts';
import type { GrowingSurface } from './growing-surface.ts';
import type { TubeLayout } from './tube-layout.ts';

/** Adds plain tubes to a surface: staggered rings and the strips of triangles between them. */
export class TubeStrips {
  private readonly forest: Forest;
  private readonly layout: TubeLayout;
  private readonly numbers: Int32Array;
  private readonly around: number;
  /** Corners of an even ring at 2j half steps, of an odd ring at 2j + 1. */
  private readonly cosine: Float64Array;
  private readonly sine: Float64Array;

  /** @param numbers (n) what each row's vessel is called by */
  constructor(forest: Forest, layout: TubeLayout, numbers: Int32Array, around: number) {
    this.forest = forest;
    this.layout = layout;
    this.numbers = numbers;
    this.around = around;
    this.cosine = Float64Array.from({ length: 2 * around }, (_, j) => Math.cos((Math.PI * j) / around));
    this.sine = Float64Array.from({ length: 2 * around }, (_, j) => Math.sin((Math.PI * j) / around));
  }

  /** Adds rings and strips of a vessel; returns the first vertex of its first ring. */
  add(out: GrowingSurface, row: number): number {
    const { around } = this;
    const strips = this.layout.strips[row]!;
    const start = out.vertices;
    const vessel = this.numbers[row]!;
    for (let k = 0; k <= strips; k++) this.addRing(out, row, k);
    for (let k = 0; k < strips; k++) {
      const low = start + k * around;
      const high = low + around;
      for (let j = 0; j < around; j++) {
        const next = j + 1 === around ? 0 : j + 1;
        if ((k & 1) === 0) {
          out.addTriangle(low + j, low + next, high + j, 0, vessel);
          out.addTriangle(low + next, high + next, high + j, 0, vessel);
        } else {
          out.addTriangle(low + j, low + next, high + next, 0, vessel);
          out.addTriangle(low + j, high + next, high + j, 0, vessel);
        }
      }
    }
    return start;
  }

  /** Adds the corners of ring k of a vessel; returns the first. */
  addRing(out: GrowingSurface, row: number, k: number): number {
    const { forest, layout, around, cosine, sine } = this;
    const parent = forest.parent[row]!;
    const ux = layout.axis[3 * row]!;
    const uy = layout.axis[3 * row + 1]!;
    const uz = layout.axis[3 * row + 2]!;
    const ex = layout.side[3 * row]!;
    const ey = layout.side[3 * row + 1]!;
    const ez = layout.side[3 * row + 2]!;
    const fx = uy * ez - uz * ey;
    const fy = uz * ex - ux * ez;
    const fz = ux * ey - uy * ex;
    const a = layout.corner[row]!;
    const strips = layout.strips[row]!;
    const t = strips === 0 ? 0 : k / strips;
    const s = layout.first[row]! + t * (layout.last[row]! - layout.first[row]!);
    const along = s / layout.length[row]!;
    const cx = forest.position[3 * parent]! + s * ux;
    const cy = forest.position[3 * parent + 1]! + s * uy;
    const cz = forest.position[3 * parent + 2]! + s * uz;
    const start = out.vertices;
    for (let j = 0; j < around; j++) {
      const c = a * cosine[2 * j + (k & 1)]!;
      const d = a * sine[2 * j + (k & 1)]!;
      out.addVertex(cx + c * ex + d * fx, cy + c * ey + d * fy, cz + c * ez + d * fz, row, along);
    }
    return start;
  }
}

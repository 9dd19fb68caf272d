import { inputError } from '../core/errors.ts';
import { type Children, listChildren } from '../tree/children.ts';
import type { Forest, TreeKind } from '../tree/forest.ts';
import { vesselOfRow } from '../tree/vessels.ts';
import { addCap, listPatches } from './caps.ts';
import { buildDisc, type Disc } from './disc.ts';
import type { GrowingSurface } from './growing-surface.ts';
import { PatchBuilder } from './junction-patch.ts';
import { JunctionShape } from './junction-shape.ts';
import type { LumenPatch, LumenProblem } from './lumen.ts';
import { layOutTubes, type TubeLayout } from './tube-layout.ts';
import { TubeStrips } from './tube-strips.ts';

export interface LumenOptions {
  /** Segments round a vessel, 6 to 256; default 24. */
  readonly around?: number | undefined;
  /** Axial edges over circumferential edges in plain tubes, 1 to 3.5; default 1. */
  readonly axialStretch?: number | undefined;
  /** One a tree; `supply` where not given. Decides which caps are inlets. */
  readonly kinds?: readonly TreeKind[] | undefined;
  /** (n) number that each row's vessel is called by; the forest's own vessel numbers (tree/vessels.ts) where left out. */
  readonly vesselNumbers?: ArrayLike<number> | undefined;
}

export const LUMEN_DEFAULTS = { around: 24, axialStretch: 1 } as const;
export const AROUND_RANGE = { min: 6, max: 256 } as const;

/** Smallest angle a mesh promises, in degrees. */
export const LEAST_ANGLE = 15;

/** What of a lumen is decided before its first triangle, and what makes its parts one by one. */
export class LumenPlan {
  readonly forest: Forest;
  readonly children: Children;
  readonly layout: TubeLayout;
  readonly numbers: Int32Array;
  readonly around: number;
  readonly strips: TubeStrips;
  /** The wall first, then the caps in row order. */
  readonly patches: readonly LumenPatch[];
  private readonly disc: Disc;
  private readonly builder: PatchBuilder;
  private readonly found: Omit<LumenProblem, 'vessel'>[] = [];

  /** @throws InputError for options out of range */
  constructor(forest: Forest, options: LumenOptions) {
    const around = options.around ?? LUMEN_DEFAULTS.around;
    const stretch = options.axialStretch ?? LUMEN_DEFAULTS.axialStretch;
    const { min, max } = AROUND_RANGE;
    if (!(Number.isInteger(around) && around >= min && around <= max))
      throw inputError('out-of-range', 'around', `got ${around}, expected a whole number from ${min} to ${max}`);
    if (!(stretch >= 1 && stretch <= 3.5))
      throw inputError('out-of-range', 'axialStretch', `got ${stretch}, expected 1 to 3.5`);
    this.forest = forest;
    this.around = around;
    this.children = listChildren(forest);
    this.numbers = Int32Array.from(
      options.vesselNumbers ?? Int32Array.from({ length: forest.count }, (_, row) => vesselOfRow(forest, row)),
    );
    const shape = new JunctionShape();
    const chord = 2 * Math.sin(Math.PI / around);
    this.layout = layOutTubes(forest, this.children, shape, around, 0.99 * chord * stretch, this.found);
    this.strips = new TubeStrips(forest, this.layout, this.numbers, around);
    this.patches = listPatches(forest, this.children, this.layout, this.numbers, options.kinds);
    this.disc = buildDisc(around);
    this.builder = new PatchBuilder(forest, this.children, this.layout, shape, around);
  }

  /** Whether the node of a row has a patch of wall round it: not a root, not a terminal. */
  isInner(row: number): boolean {
    return this.forest.parent[row]! >= 0 && this.children.start[row] !== this.children.start[row + 1];
  }

  /** Row of the vessel that ends at the cap of a root or a terminal. */
  vesselAt(row: number): number {
    return this.forest.parent[row]! < 0 ? this.children.list[this.children.start[row]!]! : row;
  }

  /**
   * Adds the disc of a cap.
   *
   * @param rings (n) first vertex of each vessel's first ring
   * @param index number of the patch, not the wall's
   */
  addCap(out: GrowingSurface, rings: Int32Array, index: number): void {
    const patch = this.patches[index]!;
    const root = this.forest.parent[patch.row]! < 0;
    const vessel = this.vesselAt(patch.row);
    const rim = rings[vessel]! + (root ? 0 : this.layout.strips[vessel]!) * this.around;
    addCap(out, this.layout, this.disc, patch, vessel, root, rim, index);
  }

  /**
   * Adds the wall round an inner node.
   *
   * @param rings (n) first vertex of each vessel's first ring; those of the node's vessel and its daughters are looked at
   */
  addPatch(out: GrowingSurface, rings: Int32Array, row: number): void {
    const poor = Math.sin((LEAST_ANGLE * Math.PI) / 180);
    const worst = this.builder.addPatch(out, rings, this.numbers, row);
    if (worst >= poor * poor) return;
    const angle = (Math.asin(Math.sqrt(Math.max(0, worst))) * 180) / Math.PI;
    const why =
      worst < 0 ? 'the wall of this junction is folded' : `smallest angle ${angle.toFixed(1)}°, wanted ${LEAST_ANGLE}°`;
    this.found.push({ row, why });
  }

  /** About how many triangles the whole will have; patches by their mean at 12 and 24 segments, within some tenth. */
  get triangles(): number {
    const { around, forest } = this;
    let tubes = 0;
    let inner = 0;
    for (let row = 0; row < forest.count; row++) {
      if (forest.parent[row]! < 0) continue;
      tubes += this.layout.strips[row]!;
      if (this.isInner(row)) inner++;
    }
    const caps = (this.patches.length - 1) * (this.disc.triangle.length / 3);
    return Math.round(2 * around * tubes + caps + 1.75 * around * around * inner);
  }

  /** What kept the parts made so far from what a mesh promises. */
  get problems(): LumenProblem[] {
    return this.found.map((problem) => ({ ...problem, vessel: this.numbers[problem.row]! }));
  }
}

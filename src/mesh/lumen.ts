/** Part of the lumen surface that a solver gives a name: the wall, or one cap. */
export interface LumenPatch {
  /** Letters, digits and `_`, a letter first; unique. */
  readonly name: string;
  /** `wall`, or what the blood does at the cap: `inlet` where it enters the lumen, `outlet` where it leaves. */
  readonly kind: 'wall' | 'inlet' | 'outlet';
  /** Row of the forest node the cap sits at; −1 for the wall. */
  readonly row: number;
  /** Tree of the cap; −1 for the wall. */
  readonly tree: number;
  /** Number of the vessel that ends here; −1 for the wall. */
  readonly vessel: number;
  /** m, centre of the cap; zeros for the wall. */
  readonly centre: readonly [number, number, number];
  /** Unit normal out of the lumen; zeros for the wall. */
  readonly normal: readonly [number, number, number];
  /** m, of the vessel that ends here; 0 for the wall. */
  readonly radius: number;
}

/** Something about a node or a vessel that kept the mesh from what it promises. */
export interface LumenProblem {
  /** Row of the node, or of the vessel that ends there. */
  readonly row: number;
  /** Number of that vessel. */
  readonly vessel: number;
  readonly why: string;
}

/** The lumen surface of a forest: one closed surface a tree. */
export interface LumenMesh {
  /** (3v) m */
  readonly position: Float64Array;
  /** (3f) vertex indices, counter-clockwise seen from outside the lumen. */
  readonly triangle: Int32Array;
  /** (f) index into `patches`. */
  readonly patch: Int32Array;
  /** (f) number of the nearest vessel. */
  readonly vessel: Int32Array;
  /** (v) row of the vessel a vertex belongs to. */
  readonly row: Int32Array;
  /** (v) place along that vessel, 0 at its root-side node, 1 at its far node. */
  readonly along: Float64Array;
  /** The wall first, then the caps in row order. */
  readonly patches: readonly LumenPatch[];
  readonly problems: readonly LumenProblem[];
  /** Segments round a vessel. */
  readonly around: number;
}

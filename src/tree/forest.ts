import type { Reals, Rows } from '../core/reals.ts';

/**
 * Rooted trees of straight tubes, one tree after another, each in preorder.
 *
 * Row i is node i and the tube parent[i] → i. A row without a parent is a tree's root: its inlet (of a draining tree
 * its outlet), which has exactly one child and no tube of its own. A node with one child is a bend, a node with none a
 * terminal. Parents precede children, and each subtree is one run of rows, so a sweep to the terminals is a `for` up
 * and a sweep to the root a `for` down.
 *
 * Two numbers name things. A *row* counts nodes. A *vessel number* counts tubes, which is the cell index in every
 * file: tree t's roots before and at a row take no vessel number, so vessel = row − tree − 1 (see vessels.ts).
 */
export interface Forest {
  /** n: rows in every column. */
  readonly count: number;
  /** (trees + 1) first row of each tree, then n. */
  readonly treeStart: Rows;
  /** (n) index of the tree a row belongs to. */
  readonly tree: Rows;
  /** (n) parent row; −1 for a root; otherwise parent[i] < i. */
  readonly parent: Rows;
  /** (3n) m; x, y, z of the tube's far end (seen from the root) at 3i, 3i + 1, 3i + 2. */
  readonly position: Reals;
  /** (n) m; lumen radius of tube i, > 0; a root repeats its child's. */
  readonly radius: Reals;
  /** (n) m³/s; magnitude of the flow in tube i, > 0; a root repeats its child's, a parent's is its children's sum. */
  readonly flow: Reals;
}

/** `supply`: blood enters at the root. `drain`: blood leaves at the root. */
export type TreeKind = 'supply' | 'drain';

/** What a flow solve adds: one value a row, at the tube or at its far end. A root's tube values repeat its child's. */
export interface FlowField {
  /** The forest the field was solved on; functions that take both refuse another. */
  readonly forest: Forest;
  /** (n) Pa at the node. */
  readonly pressure: Reals;
  /** (n) s, mean time since the blood passed the root (supply) or until it passes it (drain). */
  readonly transit: Reals;
  /** (n) Pa·s. */
  readonly viscosity: Reals;
  /** (n) m/s, cross-sectional mean. */
  readonly velocity: Reals;
  /** (n) Pa. */
  readonly wallShear: Reals;
  /** (n) by diameter, dimensionless. */
  readonly reynolds: Reals;
  /** (n) discharge haematocrit, fraction; 0 where the law does not use it. */
  readonly haematocrit: Reals;
}

/** All that a tree file holds. */
export interface TreeRecord {
  readonly forest: Forest;
  /** One a tree. */
  readonly kinds: readonly TreeKind[];
  /** One a tree; letters, digits and `_`, a letter first. */
  readonly names: readonly string[];
  readonly field: FlowField | null;
  /** (n) Strahler order, 1 at terminals; a root repeats its child's. */
  readonly order: Rows;
  /**
   * (n) m³ at demand 1; demand that a terminal's territory has, the tissue nearer to it than to its tree's others; 0 at rows
   * that are none or of trees that share their flow otherwise; a root repeats its child's. Null or left out: not measured.
   */
  readonly territory?: Reals | null;
  /** The resolved spec as JSON text, or null where the file came from elsewhere. */
  readonly provenance: string | null;
}

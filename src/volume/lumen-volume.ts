import type { LumenPatch, LumenProblem } from '../mesh/lumen.ts';

/**
 * The inside of a lumen surface as cells that share whole faces.
 *
 * Corners: a tetrahedron's fourth lies on the side of its first three from which they run counter-clockwise; a pyramid's
 * fifth so over its first four; a prism's last three so over its first three, one above each.
 */
export interface LumenVolume {
  /** (3v) m; the corners of the wall first, in the surface's order. */
  readonly position: Float64Array;
  /** (v) row of the vessel a point belongs to. */
  readonly row: Int32Array;
  /** (v) place along that vessel, 0 at its root-side node, 1 at its far node. */
  readonly along: Float64Array;
  /** (4 each) */
  readonly tetrahedron: Int32Array;
  /** (5 each) */
  readonly pyramid: Int32Array;
  /** (6 each) */
  readonly prism: Int32Array;
  /** (cells) number of each cell's vessel: tetrahedra, then pyramids, then prisms. */
  readonly vessel: Int32Array;
  /** (3 each) outer faces that are triangles, counter-clockwise seen from outside: the surface's wall, then the caps. */
  readonly triangle: Int32Array;
  readonly patchOfTriangle: Int32Array;
  /** (4 each) outer faces that are quadrilaterals: layers where they end at a cap. */
  readonly quad: Int32Array;
  readonly patchOfQuad: Int32Array;
  /** Those of the surface. */
  readonly patches: readonly LumenPatch[];
  /** Number of points on the wall; they come first. */
  readonly wallPoints: number;
  /** Discs across the tubes whose faces are faces of the mesh. */
  readonly sections: SectionList;
  readonly nodes: NodeList;
  readonly layers: number;
  readonly layerGrowth: number;
  /** What kept a part of it from what is promised. */
  readonly problems: readonly LumenProblem[];
}

/** Every ring of every tube as a disc. Its points: rim, then the layers' inner rings from the wall in, then the rest. */
export interface SectionList {
  /** Number of them. */
  readonly count: number;
  /** (s) row of the vessel. */
  readonly row: Int32Array;
  /** (s) first point of the rim. */
  readonly rim: Int32Array;
  /** (s) first of the other points. */
  readonly inside: Int32Array;
  /** The disc that all of them are copies of. */
  readonly disc: SectionDisc;
}

/** A disc of layers round a core of triangles; points numbered as in SectionList, rim first. */
export interface SectionDisc {
  readonly around: number;
  readonly layers: number;
  /** Radii of the layers' rings over the rim's: 1 first, then inwards, layers + 1 of them. */
  readonly fraction: Float64Array;
  readonly points: number;
  /** (2 points) x, y on the unit circle. */
  readonly place: Float64Array;
  /** (3 each) the core, counter-clockwise. */
  readonly triangle: Int32Array;
}

/** What each inner node has of the mesh: runs of its points and cells, node i's up to where i + 1's begin. */
export interface NodeList {
  /** (k) row of the node. */
  readonly row: Int32Array;
  /** (k + 1) first of its own points; it shares those of its wall and of the sections at its rims. */
  readonly point: Int32Array;
  /** (k + 1) first of its tetrahedra. */
  readonly tetrahedron: Int32Array;
  /** (k + 1) first of its prisms. */
  readonly prism: Int32Array;
}

import { JunctionShape } from '../mesh/junction-shape.ts';
import type { LumenMesh } from '../mesh/lumen.ts';
import { loadShape, type TubeLayout } from '../mesh/tube-layout.ts';
import type { Children } from '../tree/children.ts';
import type { Forest } from '../tree/forest.ts';
import { sectionPoint, type TubeSections, wholeTriangles } from './fill-tubes.ts';
import { GrowingRows } from './growing-column.ts';
import type { GrowingVolume } from './growing-volume.ts';
import { CoreImprover } from './improve-core.ts';
import { layerSkewness } from './layer-skew.ts';
import { layNodeLayers, type NodeWall } from './node-layers.ts';
import type { NodeWalls } from './node-walls.ts';
import { CoreRefiner } from './refine-core.ts';
import { TetMesh } from './tet-mesh.ts';

/** What the filler of nodes works on. */
export interface NodeFillerInput {
  readonly mesh: LumenMesh;
  readonly forest: Forest;
  readonly children: Children;
  readonly layout: TubeLayout;
  readonly sections: TubeSections;
  readonly walls: NodeWalls;
  readonly numbers: ArrayLike<number>;
  /** Point of the volume for each corner of the surface; −1 within caps. */
  readonly pointOf: Int32Array;
}

/** A node's wall, and the corner of the surface that each of its corners is. */
export interface NodeSurface {
  readonly wall: NodeWall;
  readonly source: Int32Array;
}

/**
 * Skewness of faces between layers for which a node does without them. Solvers call more than 4 an error; taken with the
 * cells' true centres it is up to 1.25 times what `layerSkewness` finds.
 */
const SKEWEST = 3;
/** Longest edge wanted within, over that on the widest tube. */
const COARSEST = 1.6;
/** Quality of tetrahedra that calls for another round, and how many there are. */
const POOR = 0.12;
const ROUNDS = 5;

/** Fills one inner node after another: layers along its wall, tetrahedra within. */
export class NodeFiller {
  private readonly input: NodeFillerInput;
  private readonly shape = new JunctionShape();
  private readonly core = new TetMesh();
  private readonly refiner = new CoreRefiner(this.core);
  private readonly improver = new CoreImprover(this.core);
  /** (surface corners) corner of the node's wall, for those of the last node. */
  private readonly local: Int32Array;
  private readonly whole: Int32Array;
  /** Volume points of the core's vertices, then −1. */
  private readonly points = new GrowingRows(4096);

  constructor(input: NodeFillerInput) {
    this.input = input;
    this.whole = wholeTriangles(input.sections.disc);
    this.local = new Int32Array(input.mesh.position.length / 3).fill(-1);
  }

  /**
   * Lays the layers of a node; a rim that two nodes share is laid the same way by both.
   *
   * @returns null where they would be folded, or too skew
   */
  layLayers(out: GrowingVolume, row: number): NodeSurface | null {
    const { forest, children, layout, sections } = this.input;
    const { fraction, layers } = sections.disc;
    const unit = loadShape(this.shape, forest, children, row, layout);
    const surface = this.gatherWall(row, unit, out);
    if (!layNodeLayers(this.shape, surface.wall, 1 - fraction[layers]!, fraction)) return null;
    if (!(layerSkewness(surface.wall, fraction) < SKEWEST)) return null;
    this.leanRims(out, row, unit, surface.wall);
    return surface;
  }

  /**
   * Adds the points and cells of a node.
   *
   * @param surface with layers, as `layLayers` gave it; null for none
   * @returns least quality of its tetrahedra, not above 0 where some are turned over
   */
  fill(out: GrowingVolume, row: number, surface: NodeSurface | null): number {
    const { forest, children, layout, pointOf } = this.input;
    const unit = loadShape(this.shape, forest, children, row, layout);
    if (surface !== null) {
      const inner = this.addLayers(out, row, unit, surface);
      this.startCore(out, row, unit, surface.wall, inner, true);
    } else {
      const { wall, source } = this.gatherWall(row, unit, out);
      const inner = source.map((v) => pointOf[v]!);
      this.startCore(out, row, unit, wall, inner, false);
    }
    const fixed = this.core.vertices - 1;
    let least = 0;
    // Where a fan is all needles, points find their places only after some have been reconnected.
    for (let round = 0; round < ROUNDS && !(least > POOR); round++) {
      const before = this.core.vertices;
      this.refiner.refine(40 * fixed, COARSEST * this.core.size[fixed]!);
      if (round > 0 && this.core.vertices === before) break;
      least = this.improver.improve(fixed);
    }
    this.emitCore(out, row, unit, fixed);
    return least;
  }

  /** Vessel of a tube of the shape, and its ring at the node. */
  private tubeEnd(row: number, tube: number): { vessel: number; ring: number; own: boolean } {
    const { children, layout } = this.input;
    if (tube === 0) return { vessel: row, ring: layout.strips[row]!, own: true };
    return { vessel: children.list[children.start[row]! + tube - 1]!, ring: 0, own: false };
  }

  /** Puts the points within a node's rims back to where they were. */
  raiseRims(out: GrowingVolume, row: number, upright: Float64Array): void {
    const { forest, children, layout, sections } = this.input;
    const { around, points } = sections.disc;
    loadShape(this.shape, forest, children, row, layout);
    for (let tube = 0; tube < this.shape.count; tube++) {
      const { vessel, ring } = this.tubeEnd(row, tube);
      const start = 3 * sectionPoint(sections, vessel, ring, around);
      out.position.values.set(upright.subarray(start, start + 3 * (points - around)), start);
    }
  }

  /** Moves the points of layers on rims to where the node's layers have them. */
  private leanRims(out: GrowingVolume, row: number, unit: number, wall: NodeWall): void {
    const { sections } = this.input;
    const { around, layers, fraction } = sections.disc;
    const p = out.position.values;
    for (let v = 0; v < wall.rimCorners; v++) {
      const { vessel, ring } = this.tubeEnd(row, Math.floor(v / around));
      const rim = sectionPoint(sections, vessel, ring, v % around);
      for (let l = 1; l <= layers; l++) {
        const inner = sectionPoint(sections, vessel, ring, l * around + (v % around));
        const share = (unit * (1 - fraction[l]!)) / (1 - fraction[layers]!);
        for (let k = 0; k < 3; k++) p[3 * inner + k] = p[3 * rim + k]! + share * wall.shift[3 * v + k]!;
      }
    }
  }

  /** The node's wall in units of its shape, rims first with the shifts that their layers have. */
  private gatherWall(row: number, unit: number, out: GrowingVolume): NodeSurface {
    const { mesh, forest, sections, walls } = this.input;
    const { around, layers } = sections.disc;
    const { shape, local } = this;
    const rimCorners = shape.count * around;
    const from = walls.start[row]!;
    const to = walls.start[row + 1]!;
    const triangle = new Int32Array(3 * (to - from));
    const source = new Int32Array(rimCorners + 3 * (to - from));
    let corners = 0;
    for (let tube = 0; tube < shape.count; tube++) {
      const { vessel, ring } = this.tubeEnd(row, tube);
      for (let j = 0; j < around; j++) {
        const v = sections.rim[vessel]! + ring * around + j;
        local[v] = corners;
        source[corners++] = v;
      }
    }
    for (let i = from; i < to; i++) {
      for (let k = 0; k < 3; k++) {
        const v = mesh.triangle[3 * walls.triangle[i]! + k]!;
        if (local[v]! < 0) {
          local[v] = corners;
          source[corners++] = v;
        }
        triangle[3 * (i - from) + k] = local[v]!;
      }
    }
    const position = new Float64Array(3 * corners);
    const shift = new Float64Array(3 * corners);
    for (let v = 0; v < corners; v++) {
      local[source[v]!] = -1;
      for (let k = 0; k < 3; k++)
        position[3 * v + k] = (mesh.position[3 * source[v]! + k]! - forest.position[3 * row + k]!) / unit;
    }
    for (let tube = 0, v = 0; tube < shape.count; tube++) {
      const { vessel, ring } = this.tubeEnd(row, tube);
      for (let j = 0; j < around; j++, v++) {
        const p = sectionPoint(sections, vessel, ring, layers * around + j);
        for (let k = 0; k < 3; k++)
          shift[3 * v + k] = (out.position.values[3 * p + k]! - mesh.position[3 * source[v]! + k]!) / unit;
      }
    }
    const towards = this.towardsNode(row, rimCorners);
    return { wall: { corners, rimCorners, position, triangle, shift, towards }, source: source.subarray(0, corners) };
  }

  /** Unit vectors along the tubes towards the node; zeros at rims that it shares with another node. */
  private towardsNode(row: number, rimCorners: number): Float64Array {
    const { layout, sections } = this.input;
    const out = new Float64Array(3 * rimCorners);
    for (let v = 0; v < rimCorners; v++) {
      const tube = Math.floor(v / sections.disc.around);
      if (layout.strips[this.tubeEnd(row, tube).vessel] === 0) continue;
      for (let k = 0; k < 3; k++) out[3 * v + k] = -this.shape.axis[3 * tube + k]!;
    }
    return out;
  }

  /** Adds the layers' points and prisms; returns the points inside the innermost layer by corner of the wall. */
  private addLayers(out: GrowingVolume, row: number, unit: number, { wall, source }: NodeSurface): Int32Array {
    const { mesh, pointOf, sections, walls } = this.input;
    const { around, layers, fraction } = sections.disc;
    const { corners, rimCorners, shift, triangle } = wall;
    let outer = source.map((v) => pointOf[v]!);
    const start = walls.start[row]!;
    for (let l = 1; l <= layers; l++) {
      const inner = new Int32Array(corners);
      const share = (unit * (1 - fraction[l]!)) / (1 - fraction[layers]!);
      for (let v = 0; v < corners; v++) {
        if (v < rimCorners) {
          const { vessel, ring } = this.tubeEnd(row, Math.floor(v / around));
          inner[v] = sectionPoint(sections, vessel, ring, l * around + (v % around));
          continue;
        }
        const g = source[v]!;
        inner[v] = out.addPoint(
          mesh.position[3 * g]! + share * shift[3 * v]!,
          mesh.position[3 * g + 1]! + share * shift[3 * v + 1]!,
          mesh.position[3 * g + 2]! + share * shift[3 * v + 2]!,
          mesh.row[g]!,
          mesh.along[g]!,
        );
      }
      for (let t = 0; t < triangle.length; t += 3) {
        const [a, b, c] = [triangle[t]!, triangle[t + 1]!, triangle[t + 2]!];
        const vessel = mesh.vessel[walls.triangle[start + t / 3]!]!;
        out.addPrism(inner[a]!, inner[b]!, inner[c]!, outer[a]!, outer[b]!, outer[c]!, vessel);
      }
      outer = inner;
    }
    return outer;
  }

  /**
   * Fills what lies within the wall, or within its layers, with a fan about the node.
   *
   * @param inner    point for each corner of the wall
   * @param layered  whether the discs at the rims are their cores alone
   */
  private startCore(
    out: GrowingVolume,
    row: number,
    unit: number,
    wall: NodeWall,
    inner: Int32Array,
    layered: boolean,
  ): void {
    const { forest, sections } = this.input;
    const { core, shape, points } = this;
    const { around, layers, points: discPoints, triangle } = sections.disc;
    // Corners of a disc up to here are on the wall or within its layers.
    const rim = layered ? layers * around : 0;
    const within = discPoints - rim - around;
    const triangles = layered ? triangle : this.whole;
    core.reset();
    points.count = 0;
    const add = (point: number): void => {
      const p = out.position.values;
      core.addVertex(
        (p[3 * point]! - forest.position[3 * row]!) / unit,
        (p[3 * point + 1]! - forest.position[3 * row + 1]!) / unit,
        (p[3 * point + 2]! - forest.position[3 * row + 2]!) / unit,
        0,
      );
      points.push(point);
    };
    for (let v = 0; v < wall.corners; v++) add(inner[v]!);
    const discs = core.vertices;
    for (let tube = 0; tube < shape.count; tube++) {
      const { vessel, ring } = this.tubeEnd(row, tube);
      for (let i = 0; i < within; i++) add(sectionPoint(sections, vessel, ring, rim + around + i));
    }
    const node = core.addVertex(0, 0, 0, 0);
    for (let t = 0; t < wall.triangle.length; t += 3)
      core.plan(node, wall.triangle[t]!, wall.triangle[t + 1]!, wall.triangle[t + 2]!);
    for (let tube = 0; tube < shape.count; tube++) {
      const { own } = this.tubeEnd(row, tube);
      const at = (v: number): number => {
        const i = v - rim;
        return i < around ? tube * around + i : discs + tube * within + i - around;
      };
      for (let t = 0; t < triangles.length; t += 3) {
        const a = at(triangles[t]!);
        const b = at(triangles[t + 1]!);
        const c = at(triangles[t + 2]!);
        if (own) core.plan(node, a, c, b);
        else core.plan(node, a, b, c);
      }
    }
    this.sizeBoundary(node);
    core.replace([], 0, true);
  }

  /** Gives each vertex of the boundary the mean length of its edges there, and the node that of the widest tube. */
  private sizeBoundary(node: number): void {
    const { core, shape } = this;
    const sum = new Float64Array(core.vertices);
    const count = new Float64Array(core.vertices);
    for (let i = 0; i < core.freshCount; i++) {
      for (let k = 1; k < 4; k++) {
        const a = core.fresh[4 * i + k]!;
        const b = core.fresh[4 * i + (k === 3 ? 1 : k + 1)]!;
        const edge = Math.sqrt(core.squared(a, b));
        sum[a]! += edge;
        sum[b]! += edge;
        count[a]!++;
        count[b]!++;
      }
    }
    for (let v = 0; v < node; v++) core.size[v] = sum[v]! / count[v]!;
    let widest = 0;
    for (let tube = 0; tube < shape.count; tube++) widest = Math.max(widest, shape.edge[tube]!);
    core.size[node] = widest;
  }

  private emitCore(out: GrowingVolume, row: number, unit: number, fixed: number): void {
    const { forest, layout, numbers } = this.input;
    const { core, shape, points } = this;
    const place = (x: number, y: number, z: number): number => {
      shape.lookAt(x, y, z);
      return shape.nearest();
    };
    const p = core.position;
    for (let v = fixed; v < core.vertices; v++) {
      const [x, y, z] = [p[3 * v]!, p[3 * v + 1]!, p[3 * v + 2]!];
      const tube = place(x, y, z);
      const { vessel } = this.tubeEnd(row, tube);
      const t = Math.min(1, (unit * shape.along) / layout.length[vessel]!);
      const { position } = forest;
      points.push(
        out.addPoint(
          position[3 * row]! + unit * x,
          position[3 * row + 1]! + unit * y,
          position[3 * row + 2]! + unit * z,
          vessel,
          tube === 0 ? 1 - t : t,
        ),
      );
    }
    for (let t = 0; t < core.slots; t++) {
      const a = core.corner[4 * t]!;
      if (a < 0) continue;
      const b = core.corner[4 * t + 1]!;
      const c = core.corner[4 * t + 2]!;
      const d = core.corner[4 * t + 3]!;
      const mean = (k: number): number => (p[3 * a + k]! + p[3 * b + k]! + p[3 * c + k]! + p[3 * d + k]!) / 4;
      const vessel = numbers[this.tubeEnd(row, place(mean(0), mean(1), mean(2))).vessel]!;
      const q = points.values;
      out.addTetrahedron(q[a]!, q[b]!, q[c]!, q[d]!, vessel);
    }
  }
}

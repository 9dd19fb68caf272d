import { InvariantError } from '../core/errors.ts';
import type { Children } from '../tree/children.ts';
import type { Forest } from '../tree/forest.ts';
import type { GrowingSurface } from './growing-surface.ts';
import type { JunctionShape } from './junction-shape.ts';
import { APEX, FREE, PatchMesh, RIM } from './patch-mesh.ts';
import { Remesher, RIM_SIZE } from './remesh.ts';
import { triangulateDirections } from './sphere-hull.ts';
import { ThinTubes } from './thin-tubes.ts';
import { loadShape, type TubeLayout } from './tube-layout.ts';

/** Directions of an icosahedron's corners, turned so that none lies along a coordinate axis. */
const SPREAD = ((): Float64Array => {
  const g = (1 + Math.sqrt(5)) / 2;
  const out: number[] = [];
  for (const s of [-1, 1]) {
    for (const t of [-1, 1]) out.push(0, s, t * g, s, t * g, 0, t * g, 0, s);
  }
  const scale = 1 / Math.sqrt(1 + g * g);
  const [c1, s1, c2, s2] = [Math.cos(0.3), Math.sin(0.3), Math.cos(0.7), Math.sin(0.7)];
  for (let i = 0; i < out.length; i += 3) {
    const x = scale * out[i]!;
    const y = scale * out[i + 1]!;
    const z = scale * out[i + 2]!;
    const x1 = c1 * x - s1 * y;
    const y1 = s1 * x + c1 * y;
    out[i] = x1;
    out[i + 1] = c2 * y1 - s2 * z;
    out[i + 2] = s2 * y1 + c2 * z;
  }
  return Float64Array.from(out);
})();

/** How often a patch is tried, from a start a little different each time, until its score is good. */
const ATTEMPTS = 6;
/** Factor by which swollen tubes shrink at a step, at each attempt. */
const SHRINK = [0.7, 0.8, 0.6, 0.85];
/** sin² of the smallest angle that ends the tries: 22°. */
const ENOUGH = 0.14;

/** Builds the wall of one inner node after another. */
export class PatchBuilder {
  private readonly mesh = new PatchMesh();
  private readonly remesher: Remesher;
  private readonly thin: ThinTubes;
  private readonly forest: Forest;
  private readonly children: Children;
  private readonly layout: TubeLayout;
  private readonly shape: JunctionShape;
  private readonly around: number;
  /** Vertex of the surface for each vertex of the patch; −1 where there is none yet. */
  private global: number[] = [];
  /** Axial place of each rim, in units of the shape. */
  private rim: number[] = [];
  /** Angle from each axis within which there are no spread points. */
  private circles: number[] = [];

  constructor(forest: Forest, children: Children, layout: TubeLayout, shape: JunctionShape, around: number) {
    this.forest = forest;
    this.children = children;
    this.layout = layout;
    this.shape = shape;
    this.around = around;
    this.remesher = new Remesher(this.mesh, shape);
    this.thin = new ThinTubes(shape);
  }

  /**
   * Adds the wall of a node to a surface that already has the rings.
   *
   * @param rings (n) first vertex of each vessel's first ring
   * @param numbers (n) what each row's vessel is called by
   * @returns     the worst score of its triangles: sin² of the smallest angle, or less than 0 where the wall is folded
   */
  addPatch(out: GrowingSurface, rings: Int32Array, numbers: Int32Array, row: number): number {
    const { forest, children, layout, shape } = this;
    const unit = loadShape(shape, forest, children, row, layout);
    let best = -Infinity;
    let bestAttempt = 0;
    let last = 0;
    const tight = layout.tight[row] === 1;
    for (let attempt = 0; attempt < (tight ? 1 : ATTEMPTS) && best < ENOUGH; attempt++) {
      const score = this.tryPatch(out, rings, row, unit, attempt);
      last = attempt;
      if (score > best) {
        best = score;
        bestAttempt = attempt;
      }
      if (this.overlapping) break;
    }
    if (last !== bestAttempt) this.tryPatch(out, rings, row, unit, bestAttempt);
    this.emit(out, numbers, row, unit);
    return best;
  }

  /** Whether the rims of the last patch ran into each other. */
  private overlapping = false;

  private tryPatch(out: GrowingSurface, rings: Int32Array, row: number, unit: number, attempt: number): number {
    const { mesh, shape, around, thin, remesher } = this;
    mesh.reset();
    this.addRims(out, rings, row, unit);
    const most = this.mostVertices();
    const swollen = thin.swell(this.rim, attempt >> 1);
    if (swollen) thin.takeRims(mesh, around);
    this.circles.length = 0;
    for (let tube = 0; tube < shape.count; tube++)
      this.circles.push(Math.atan2(shape.radius[tube]!, this.rim[tube]!) + 0.35);
    this.addSpread(shape.axis, attempt);
    this.overlapping = !triangulateDirections(mesh, this.directions(attempt)) || !this.markCaps();
    if (this.overlapping) {
      // Join the rims as if they were small enough to be apart. Closed, if not simple.
      thin.restore();
      mesh.reset();
      this.addRims(out, rings, row, unit);
      if (!triangulateDirections(mesh, this.shrunkDirections()) || !this.markCaps())
        throw new InvariantError(`addPatch: no triangulation of the rims of node ${row}`);
    }
    const strained = this.overlapping || this.layout.tight[row] === 1;
    remesher.start(strained ? Math.min(most, 24 * around * shape.count) : most, attempt);
    if (swollen && !this.overlapping) {
      for (let more = true; more; ) {
        more = thin.shrink(mesh, SHRINK[attempt % SHRINK.length]!);
        remesher.follow(around);
      }
    }
    const worst = remesher.finish(around);
    return this.overlapping ? Math.min(worst, -1) : worst;
  }

  /** Far more vertices than a sound patch comes to: its wall over the area of a vertex, three times. */
  private mostVertices(): number {
    const { shape, rim } = this;
    let most = 400;
    for (let tube = 0; tube < shape.count; tube++) {
      const a = shape.radius[tube]!;
      const edge = shape.edge[tube]!;
      const seen = Math.max(0, rim[tube]! - shape.leaves(tube)) + 4 * a;
      most += (3 * (2 * Math.PI * a * seen)) / (0.6 * edge * edge);
    }
    return most;
  }

  /** Row of the vessel that a tube of the shape stands for. */
  private vessel(row: number, tube: number): number {
    return tube === 0 ? row : this.children.list[this.children.start[row]! + tube - 1]!;
  }

  private addRims(out: GrowingSurface, rings: Int32Array, row: number, unit: number): void {
    const { forest, layout, shape, mesh, around } = this;
    const px = forest.position[3 * row]!;
    const py = forest.position[3 * row + 1]!;
    const pz = forest.position[3 * row + 2]!;
    for (let tube = 0; tube < shape.count; tube++) {
      const vessel = this.vessel(row, tube);
      const own = tube === 0;
      const s = (own ? layout.length[vessel]! - layout.last[vessel]! : layout.first[vessel]!) / unit;
      this.rim[tube] = s;
      const apex = mesh.addVertex(
        s * shape.axis[3 * tube]!,
        s * shape.axis[3 * tube + 1]!,
        s * shape.axis[3 * tube + 2]!,
        0,
        APEX,
      );
      this.global[apex] = -1;
      const ring = rings[vessel]! + (own ? layout.strips[vessel]! : 0) * around;
      for (let j = 0; j < around; j++) {
        const g = ring + j;
        const x = (out.position[3 * g]! - px) / unit;
        const y = (out.position[3 * g + 1]! - py) / unit;
        const z = (out.position[3 * g + 2]! - pz) / unit;
        shape.lookAt(x, y, z);
        const size = Math.max(shape.edgeHere(), RIM_SIZE * shape.edge[tube]!);
        this.global[mesh.addVertex(x, y, z, size, RIM)] = g;
      }
    }
  }

  /** Adds a few points of the wall well away from the rims, so that the hull of the directions holds the node. */
  private addSpread(axes: Float64Array, attempt: number): void {
    const { shape, mesh, circles } = this;
    const mirror = (attempt & 1) === 0 ? 1 : -1;
    for (let i = 0; i < SPREAD.length; i += 3) {
      const x = mirror * SPREAD[i]!;
      const y = SPREAD[i + 1]!;
      const z = SPREAD[i + 2]!;
      let free = true;
      for (let tube = 0; tube < shape.count && free; tube++) {
        const dot = x * axes[3 * tube]! + y * axes[3 * tube + 1]! + z * axes[3 * tube + 2]!;
        if (Math.acos(Math.max(-1, Math.min(1, dot))) < circles[tube]!) free = false;
      }
      if (!free) continue;
      shape.lookAt(x, y, z);
      shape.shoot();
      this.global[mesh.addVertex(shape.x, shape.y, shape.z, shape.edgeHere(), FREE)] = -1;
    }
  }

  /** Directions of the vertices, shaken by a millionth of an edge, for rims of equal tubes lie in common circles. */
  private directions(attempt: number): Float64Array {
    const { mesh } = this;
    const out = new Float64Array(3 * mesh.vertices);
    let noise = 12345 + attempt;
    for (let v = 0; v < mesh.vertices; v++) {
      let square = 0;
      for (let k = 0; k < 3; k++) {
        noise = (Math.imul(noise, 1664525) + 1013904223) >>> 0;
        const x = mesh.position[3 * v + k]! + 1e-6 * mesh.size[v]! * (noise / 4294967296 - 0.5);
        out[3 * v + k] = x;
        square += x * x;
      }
      const scale = 1 / Math.sqrt(square);
      for (let k = 0; k < 3; k++) out[3 * v + k]! *= scale;
    }
    return out;
  }

  /**
   * Directions on circles round the axes, so small that they are apart; round other axes where two nearly coincide.
   * Adds the spread points that lie outside them.
   */
  private shrunkDirections(): Float64Array {
    const { shape, around } = this;
    const { count } = shape;
    let axes: Float64Array = shape.axis;
    if (leastAngles(axes, count).some((angle) => angle < 0.05)) axes = evenDirections(count);
    const least = leastAngles(axes, count);
    const rims = count * (around + 1);
    this.circles.length = 0;
    for (let tube = 0; tube < count; tube++) this.circles.push(0.6 * Math.min(1, least[tube]!));
    this.addSpread(axes, 0);
    const out = this.directions(0);
    for (let tube = 0, v = 0; tube < count; tube++) {
      const c = Math.cos(0.4 * Math.min(1, least[tube]!));
      const s = Math.sin(0.4 * Math.min(1, least[tube]!));
      const [ux, uy, uz] = [axes[3 * tube]!, axes[3 * tube + 1]!, axes[3 * tube + 2]!];
      const [ex, ey, ez] = squareTo(ux, uy, uz);
      // Rings run counter-clockwise about the way from the root, which enters the node in its own tube.
      const turn = tube === 0 ? -1 : 1;
      out[3 * v] = ux;
      out[3 * v + 1] = uy;
      out[3 * v + 2] = uz;
      v++;
      for (let j = 0; j < around; j++, v++) {
        const p = s * Math.cos((2 * Math.PI * j) / around);
        const q = s * turn * Math.sin((2 * Math.PI * j) / around);
        out[3 * v] = c * ux + p * ex + q * (uy * ez - uz * ey);
        out[3 * v + 1] = c * uy + p * ey + q * (uz * ex - ux * ez);
        out[3 * v + 2] = c * uz + p * ez + q * (ux * ey - uy * ex);
      }
    }
    // Shaken like the others.
    const shaken = this.directions(1);
    for (let i = 0; i < 3 * rims; i++) out[i]! += 1e-7 * (shaken[i]! - 0.5);
    return out;
  }

  /** Marks the triangles round the apexes; whether they are the fans over the rims and nothing else. */
  private markCaps(): boolean {
    const { mesh, around } = this;
    let caps = 0;
    for (let t = 0; t < mesh.triangles; t++) {
      if (mesh.from[3 * t]! < 0) continue;
      for (let h = 3 * t; h < 3 * t + 3; h++) {
        const apex = mesh.from[h]!;
        if (mesh.kind[apex] !== APEX) continue;
        // Rim corners follow their apex in mesh order.
        const i = mesh.from[mesh.next(h)]! - apex - 1;
        const j = mesh.from[mesh.previous(h)]! - apex - 1;
        if (i < 0 || j < 0 || i >= around || j >= around) return false;
        const step = (j - i + around) % around;
        if (step !== 1 && step !== around - 1) return false;
        mesh.cap[t] = 1;
        caps++;
      }
    }
    return caps === this.shape.count * around;
  }

  private emit(out: GrowingSurface, numbers: Int32Array, row: number, unit: number): void {
    const { forest, layout, shape, mesh, global } = this;
    const px = forest.position[3 * row]!;
    const py = forest.position[3 * row + 1]!;
    const pz = forest.position[3 * row + 2]!;
    for (let v = 0; v < mesh.vertices; v++) {
      if (mesh.kind[v] !== FREE) continue;
      const x = mesh.position[3 * v]!;
      const y = mesh.position[3 * v + 1]!;
      const z = mesh.position[3 * v + 2]!;
      shape.lookAt(x, y, z);
      const tube = shape.nearest();
      const vessel = this.vessel(row, tube);
      const t = Math.min(1, (unit * shape.along) / layout.length[vessel]!);
      global[v] = out.addVertex(px + unit * x, py + unit * y, pz + unit * z, vessel, tube === 0 ? 1 - t : t);
    }
    const p = mesh.position;
    for (let t = 0; t < mesh.triangles; t++) {
      const a = mesh.from[3 * t]!;
      if (a < 0 || mesh.cap[t] === 1) continue;
      const b = mesh.from[3 * t + 1]!;
      const c = mesh.from[3 * t + 2]!;
      shape.lookAt(
        (p[3 * a]! + p[3 * b]! + p[3 * c]!) / 3,
        (p[3 * a + 1]! + p[3 * b + 1]! + p[3 * c + 1]!) / 3,
        (p[3 * a + 2]! + p[3 * b + 2]! + p[3 * c + 2]!) / 3,
      );
      const tube = shape.nearest();
      out.addTriangle(global[a]!, global[b]!, global[c]!, 0, numbers[this.vessel(row, tube)]!);
    }
  }
}

/** Angle from each of some unit vectors to the nearest other. */
function leastAngles(axes: Float64Array, count: number): number[] {
  return Array.from({ length: count }, (_, i) => {
    let least = Math.PI;
    for (let j = 0; j < count; j++) {
      if (j === i) continue;
      let dot = 0;
      for (let k = 0; k < 3; k++) dot += axes[3 * i + k]! * axes[3 * j + k]!;
      least = Math.min(least, Math.acos(Math.max(-1, Math.min(1, dot))));
    }
    return least;
  });
}

/** Directions spread evenly by the golden angle. */
function evenDirections(count: number): Float64Array {
  const out = new Float64Array(3 * count);
  for (let i = 0; i < count; i++) {
    const z = 1 - (2 * i + 1) / count;
    const r = Math.sqrt(1 - z * z);
    const angle = i * Math.PI * (3 - Math.sqrt(5));
    out[3 * i] = r * Math.cos(angle);
    out[3 * i + 1] = r * Math.sin(angle);
    out[3 * i + 2] = z;
  }
  return out;
}

/** A unit vector square to another. */
function squareTo(x: number, y: number, z: number): [number, number, number] {
  const [ax, ay] = Math.abs(x) < 0.6 ? [1 - x * x, -x * y] : [-x * y, 1 - y * y];
  const az = Math.abs(x) < 0.6 ? -x * z : -y * z;
  const scale = 1 / Math.sqrt(ax * ax + ay * ay + az * az);
  return [ax * scale, ay * scale, az * scale];
}

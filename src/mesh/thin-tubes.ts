import type { JunctionShape } from './junction-shape.ts';
import { FREE, type PatchMesh } from './patch-mesh.ts';

/** Radii over the widest that thin tubes are swollen to, the first that fits. */
const SWOLLEN = [0.2, 0.16, 0.13, 0.1, 0.08, 0.06, 0.045, 0.03];
/** Tubes thinner than this, over the widest, are worth it. */
const THIN = 0.15;

/**
 * Lets a patch be begun with its thin tubes swollen, and shrinks them step by step while the mesh follows.
 *
 * A tube much thinner than the node is wide is seen from the node under a tiny angle, and where it leaves the trunk's
 * wall at a slant its wall runs nearly along the rays: a coarse mesh of the node's surroundings cannot tell its near
 * side from its far side. Swollen to a fifth of the trunk it can. While it shrinks, everything near it is drawn
 * towards the point where its axis leaves the wider tubes, so that the mesh there stays nearly similar to itself.
 */
export class ThinTubes {
  private readonly shape: JunctionShape;
  private radius = new Float64Array(8);
  private edge = new Float64Array(8);
  /** Rim place beyond what is clear, over the radius. */
  private slack = new Float64Array(8);
  /** Real rim corners in mesh order: apex, then `around` corners, a tube. */
  private corner = new Float64Array(0);
  private around = 0;
  private swollen = 0;

  constructor(shape: JunctionShape) {
    this.shape = shape;
  }

  /**
   * Swells the shape's thin tubes.
   *
   * @param rim  axial place of each rim
   * @param skip sizes that would fit to be passed over, where there are more
   * @returns whether there are any
   */
  swell(rim: readonly number[], skip: number): boolean {
    const { shape } = this;
    const { count } = shape;
    if (this.radius.length < count) {
      this.radius = new Float64Array(count);
      this.edge = new Float64Array(count);
      this.slack = new Float64Array(count);
    }
    let thinnest = Infinity;
    for (let i = 0; i < count; i++) {
      this.radius[i] = shape.radius[i]!;
      this.edge[i] = shape.edge[i]!;
      thinnest = Math.min(thinnest, shape.radius[i]!);
    }
    this.swollen = 0;
    if (thinnest >= THIN) return false;
    for (let i = 0; i < count; i++) this.slack[i] = (rim[i]! - shape.clearAlong(i, false)) / this.radius[i]!;
    let left = skip;
    for (const size of SWOLLEN) {
      if (size <= thinnest) break;
      this.setRadii(size);
      let fits = true;
      for (let i = 0; i < count && fits; i++)
        if (this.radius[i]! >= size && shape.clearAlong(i, false) > rim[i]! + 1e-9) fits = false;
      if (!fits) continue;
      this.swollen = size;
      if (left-- === 0) break;
    }
    this.setRadii(this.swollen);
    return this.swollen > 0;
  }

  /** Gives the shape its real radii back. */
  restore(): void {
    this.setRadii(0);
    this.swollen = 0;
  }

  /** Takes the real rims from a mesh and puts the swollen ones in their place. */
  takeRims(mesh: PatchMesh, around: number): void {
    this.around = around;
    this.corner = mesh.position.slice(0, 3 * this.shape.count * (around + 1));
    this.placeRims(mesh);
  }

  /** Shrinks the tubes by a factor, or to their real radii, and draws the mesh along; whether there is more to shrink. */
  shrink(mesh: PatchMesh, factor: number): boolean {
    const { shape } = this;
    const { count } = shape;
    const before = shape.radius.slice(0, count);
    let size = this.swollen * factor;
    if (!this.radius.subarray(0, count).some((r) => r < size)) size = 0;
    this.setRadii(size);
    this.swollen = size;
    const p = mesh.position;
    for (let i = 0; i < count; i++) {
      const drawn = shape.radius[i]! / before[i]!;
      if (drawn > 1 - 1e-12) continue;
      const ux = shape.axis[3 * i]!;
      const uy = shape.axis[3 * i + 1]!;
      const uz = shape.axis[3 * i + 2]!;
      const s = shape.leaves(i);
      for (let v = 0; v < mesh.vertices; v++) {
        if (mesh.kind[v] !== FREE) continue;
        shape.lookAt(p[3 * v]!, p[3 * v + 1]!, p[3 * v + 2]!);
        const away = shape.distance(i) / before[i]!;
        // All of it up to 1.5 radii from the axis, nothing from 4 radii on.
        const share = Math.min(1, Math.max(0, (4 - away) / 2.5));
        const scale = 1 - share * (1 - drawn);
        p[3 * v] = s * ux + scale * (p[3 * v]! - s * ux);
        p[3 * v + 1] = s * uy + scale * (p[3 * v + 1]! - s * uy);
        p[3 * v + 2] = s * uz + scale * (p[3 * v + 2]! - s * uz);
      }
    }
    this.placeRims(mesh);
    return size > 0;
  }

  private setRadii(size: number): void {
    const { shape } = this;
    for (let i = 0; i < shape.count; i++) {
      const r = Math.max(this.radius[i]!, size);
      shape.radius[i] = r;
      shape.edge[i] = (this.edge[i]! * r) / this.radius[i]!;
    }
  }

  private placeRims(mesh: PatchMesh): void {
    const { shape, around, corner } = this;
    const p = mesh.position;
    for (let i = 0; i < shape.count; i++) {
      const apex = i * (around + 1);
      const wide = shape.radius[i]! / this.radius[i]!;
      const real = wide === 1;
      const s = real ? 0 : shape.clearAlong(i, false) + this.slack[i]! * shape.radius[i]!;
      for (let v = apex; v <= apex + around; v++) {
        for (let k = 0; k < 3; k++) {
          const x = corner[3 * v + k]!;
          p[3 * v + k] = real ? x : s * shape.axis[3 * i + k]! + wide * (x - corner[3 * apex + k]!);
        }
      }
    }
  }
}

import { depthGradient } from '../tissue/depth-gradient.ts';
import type { Tissue } from '../tissue/tissue.ts';
import { span } from './span.ts';

/** Bends tried on one way: twelve to the sides, then three from the wall inwards. */
export const BEND_PLACES = 15;
const SIDEWAYS = 12;
/** Parts of the way by which a bend stands in from the wall. */
const INWARDS = [0.1, 0.25, 0.5];

/**
 * Where a vessel may bend on its way to a site that no straight one reaches: half way, off to six sides by a third and by
 * two thirds of the way, and straight inwards from a site that lies just deep enough.
 */
export class BendPlaces {
  /** (3) m; the place last asked for. */
  readonly at = new Float64Array(3);
  private readonly tissue: Tissue;
  private readonly slope = new Float64Array(3);
  private steep = 0;

  constructor(tissue: Tissue) {
    this.tissue = tissue;
  }

  /** Looks which way is inwards at a site; to be called before `find`. */
  face(x: number, y: number, z: number): void {
    this.steep = depthGradient(this.tissue, x, y, z, this.slope);
  }

  /** Writes to `at` place number k < `BEND_PLACES` between a junction j and the site that is faced. */
  find(k: number, jx: number, jy: number, jz: number, x: number, y: number, z: number): void {
    if (k < SIDEWAYS) {
      sideways(jx, jy, jz, x, y, z, k, this.at);
      return;
    }
    const { at, slope } = this;
    const far = (INWARDS[k - SIDEWAYS]! * span(x - jx, y - jy, z - jz)) / Math.max(this.steep, 1e-9);
    at[0] = x + far * slope[0]!;
    at[1] = y + far * slope[1]!;
    at[2] = z + far * slope[2]!;
  }
}

/** A point half way from j to a site, moved off sideways: six sides by a third of the way, then by two thirds. */
function sideways(
  jx: number,
  jy: number,
  jz: number,
  x: number,
  y: number,
  z: number,
  side: number,
  out: Float64Array,
): void {
  const dx = x - jx;
  const dy = y - jy;
  const dz = z - jz;
  const length = span(dx, dy, dz);
  // Any axis that is not along the way gives a first side; the second is square to both.
  const flat = Math.abs(dx) <= Math.abs(dy) && Math.abs(dx) <= Math.abs(dz);
  const ex = flat ? 0 : dy;
  const ey = flat ? dz : -dx;
  const ez = flat ? -dy : 0;
  const e = 1 / Math.max(span(ex, ey, ez), 1e-300);
  const fx = (dy * ez - dz * ey) * e;
  const fy = (dz * ex - dx * ez) * e;
  const fz = (dx * ey - dy * ex) * e;
  const angle = ((side % 6) * Math.PI) / 3;
  const far = side < 6 ? 0.33 : 0.66;
  const c = Math.cos(angle) * far * length * e;
  const s = Math.sin(angle) * far;
  out[0] = 0.5 * (jx + x) + c * ex + s * fx;
  out[1] = 0.5 * (jy + y) + c * ey + s * fy;
  out[2] = 0.5 * (jz + z) + c * ez + s * fz;
}

import type { Triple } from '../spec/types.ts';
import type { Region } from './depth.ts';

/**
 * Signed distance to an axis-aligned ellipsoid.
 *
 * The nearest boundary point x of y has x = e² y / (t + e²) per axis for the t at which x lies on the ellipsoid:
 * F(t) = Σ (e y / (t + e²))² = 1, t > −e_min². F is convex and falling there, so Newton from a start left of the root
 * climbs to it. We keep s = t + e_min² instead of t, which does not cancel near the pole. Where y has (almost) nothing
 * along the shortest axis and the others leave F < 1 at the pole, the nearest point lies off the plane: s = 0.
 *
 * Source: the Lagrange condition of the nearest point, derived here; common practice.
 */
export function measureEllipsoid(center: Triple, radii: Triple): Region {
  const shortest = Math.min(radii[0], radii[1], radii[2]);
  const above: Triple = [
    radii[0] * radii[0] - shortest * shortest,
    radii[1] * radii[1] - shortest * shortest,
    radii[2] * radii[2] - shortest * shortest,
  ];
  const flat = 1e-13 * shortest;
  return {
    depth: (x, y, z) => {
      const p0 = Math.abs(x - center[0]);
      const p1 = Math.abs(y - center[1]);
      const p2 = Math.abs(z - center[2]);
      const y0 = above[0] === 0 && p0 < flat ? 0 : p0;
      const y1 = above[1] === 0 && p1 < flat ? 0 : p1;
      const y2 = above[2] === 0 && p2 < flat ? 0 : p2;
      // Each term alone reaches 1 here or further right, so F ≥ 1 at the start.
      let s = Math.max(radii[0] * y0 - above[0], radii[1] * y1 - above[1], radii[2] * y2 - above[2], 0);
      if (s === 0) {
        // Nothing along the shortest axes: is there a root right of the pole at all?
        let squares = 0;
        let rest = 1;
        if (above[0] > 0) {
          const q = (radii[0] * y0) / above[0];
          rest -= q * q;
          squares += y0 * y0 * ((shortest * shortest) / above[0]) * ((shortest * shortest) / above[0]);
        }
        if (above[1] > 0) {
          const q = (radii[1] * y1) / above[1];
          rest -= q * q;
          squares += y1 * y1 * ((shortest * shortest) / above[1]) * ((shortest * shortest) / above[1]);
        }
        if (above[2] > 0) {
          const q = (radii[2] * y2) / above[2];
          rest -= q * q;
          squares += y2 * y2 * ((shortest * shortest) / above[2]) * ((shortest * shortest) / above[2]);
        }
        if (rest >= 0) return Math.sqrt(squares + shortest * shortest * rest);
      }
      for (let step = 0; step < 100; step++) {
        const a = y0 === 0 ? 0 : (radii[0] * y0) / (s + above[0]);
        const b = y1 === 0 ? 0 : (radii[1] * y1) / (s + above[1]);
        const c = y2 === 0 ? 0 : (radii[2] * y2) / (s + above[2]);
        const excess = a * a + b * b + c * c - 1;
        const slope =
          2 *
          ((a === 0 ? 0 : (a * a) / (s + above[0])) +
            (b === 0 ? 0 : (b * b) / (s + above[1])) +
            (c === 0 ? 0 : (c * c) / (s + above[2])));
        const next = s + excess / slope;
        if (!(next > s)) break;
        s = next;
      }
      // x − y = −t y / (t + e²) per axis, t = s − e_min².
      const t = s - shortest * shortest;
      const a = y0 === 0 ? 0 : y0 / (s + above[0]);
      const b = y1 === 0 ? 0 : y1 / (s + above[1]);
      const c = y2 === 0 ? 0 : y2 / (s + above[2]);
      return -t * Math.sqrt(a * a + b * b + c * c);
    },
    // Shrunk to the unit sphere, no distance is less than 1 / shortest of what it was. A hair is taken off for rounding.
    depthAtLeast: (x, y, z) => {
      const a = (x - center[0]) / radii[0];
      const b = (y - center[1]) / radii[1];
      const c = (z - center[2]) / radii[2];
      const square = a * a + b * b + c * c;
      return square < 1 ? shortest * (1 - Math.sqrt(square) - 1e-14) : -Infinity;
    },
    min: [center[0] - radii[0], center[1] - radii[1], center[2] - radii[2]],
    max: [center[0] + radii[0], center[1] + radii[1], center[2] + radii[2]],
  };
}

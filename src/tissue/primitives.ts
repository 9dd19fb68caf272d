import type { Triple } from '../spec/types.ts';
import { plainRegion, type Region } from './region.ts';

/** Axis-aligned box; depth is exact on both sides. Corners in m, min < max on every axis. */
export function boxRegion(min: Triple, max: Triple): Region {
  const cx = 0.5 * (min[0] + max[0]);
  const cy = 0.5 * (min[1] + max[1]);
  const cz = 0.5 * (min[2] + max[2]);
  const hx = 0.5 * (max[0] - min[0]);
  const hy = 0.5 * (max[1] - min[1]);
  const hz = 0.5 * (max[2] - min[2]);
  return plainRegion(min, max, true, 8 * hx * hy * hz, (x, y, z) => {
    const dx = Math.abs(x - cx) - hx;
    const dy = Math.abs(y - cy) - hy;
    const dz = Math.abs(z - cz) - hz;
    const most = Math.max(dx, dy, dz);
    if (!(most > 0)) return -most;
    const ox = 0.5 * (dx + Math.abs(dx));
    const oy = 0.5 * (dy + Math.abs(dy));
    const oz = 0.5 * (dz + Math.abs(dz));
    return -Math.sqrt(ox * ox + oy * oy + oz * oz);
  });
}

/** Ball; depth is exact on both sides. Centre and radius in m, radius > 0. */
export function sphereRegion(center: Triple, radius: number): Region {
  const [cx, cy, cz] = center;
  const min: Triple = [cx - radius, cy - radius, cz - radius];
  const max: Triple = [cx + radius, cy + radius, cz + radius];
  return plainRegion(min, max, true, (4 / 3) * Math.PI * radius * radius * radius, (x, y, z) => {
    const dx = x - cx;
    const dy = y - cy;
    const dz = z - cz;
    return radius - Math.sqrt(dx * dx + dy * dy + dz * dz);
  });
}

/** Right circular cylinder with flat ends; depth is exact on both sides. Ends and radius in m, ends apart, radius > 0. */
export function cylinderRegion(from: Triple, to: Triple, radius: number): Region {
  const ux = to[0] - from[0];
  const uy = to[1] - from[1];
  const uz = to[2] - from[2];
  const length = Math.sqrt(ux * ux + uy * uy + uz * uz);
  const half = 0.5 * length;
  const wx = ux / length;
  const wy = uy / length;
  const wz = uz / length;
  const cx = 0.5 * (from[0] + to[0]);
  const cy = 0.5 * (from[1] + to[1]);
  const cz = 0.5 * (from[2] + to[2]);
  const reach = (w: number): number => half * Math.abs(w) + radius * Math.sqrt(Math.max(0, 1 - w * w));
  const [rx, ry, rz] = [reach(wx), reach(wy), reach(wz)];
  const min: Triple = [cx - rx, cy - ry, cz - rz];
  const max: Triple = [cx + rx, cy + ry, cz + rz];
  return plainRegion(min, max, true, Math.PI * radius * radius * length, (x, y, z) => {
    const dx = x - cx;
    const dy = y - cy;
    const dz = z - cz;
    const along = dx * wx + dy * wy + dz * wz;
    const px = dx - along * wx;
    const py = dy - along * wy;
    const pz = dz - along * wz;
    const side = Math.sqrt(px * px + py * py + pz * pz) - radius;
    const end = Math.abs(along) - half;
    if (side <= 0 && end <= 0) return side > end ? -side : -end;
    if (side <= 0) return -end;
    if (end <= 0) return -side;
    return -Math.sqrt(side * side + end * end);
  });
}

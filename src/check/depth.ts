import type { TriangleSurface } from '../core/surface.ts';
import { toSi } from '../core/units.ts';
import type { Shape, Triple } from '../spec/types.ts';
import { measureEllipsoid } from './ellipsoid-depth.ts';
import { measureSurface } from './surface-depth.ts';

/** Signed distance to a boundary in m, positive inside. */
export type Depth = (x: number, y: number, z: number) => number;

/** A shape as the checker sees it. */
export interface Region {
  /**
   * Exact for single shapes. For unions, intersections and differences its sign is exact, its size a lower bound of the
   * distance; it changes no faster than position.
   */
  readonly depth: Depth;
  /** A lower bound of `depth` that costs a fraction of it; only where `depth` is costly. */
  readonly depthAtLeast?: Depth | undefined;
  /** m; corners of a box that holds the region. */
  readonly min: Triple;
  readonly max: Triple;
}

/** Files of the triangle surfaces that a shape needs and the map lacks. */
export function missingSurfaces(shape: Shape, surfaces: ReadonlyMap<string, TriangleSurface>): string[] {
  switch (shape.shape) {
    case 'surface':
      return surfaces.has(shape.file) ? [] : [shape.file];
    case 'union':
    case 'intersection':
      return shape.parts.flatMap((part) => missingSurfaces(part, surfaces));
    case 'difference':
      return [shape.of, ...shape.minus].flatMap((part) => missingSurfaces(part, surfaces));
    default:
      return [];
  }
}

/** A tissue without its forbidden parts. Every surface named must be in the map, in its file's own unit. */
export function measureTissue(
  tissue: Shape,
  forbidden: readonly Shape[],
  surfaces: ReadonlyMap<string, TriangleSurface>,
): Region {
  const whole = measureShape(tissue, surfaces);
  return forbidden.length === 0
    ? whole
    : without(
        whole,
        forbidden.map((part) => measureShape(part, surfaces)),
      );
}

/** A shape of any kind. Every surface named must be in the map, in its file's own unit. */
export function measureShape(shape: Shape, surfaces: ReadonlyMap<string, TriangleSurface>): Region {
  switch (shape.shape) {
    case 'box':
      return measureBox(shape.min, shape.max);
    case 'sphere':
      return measureSphere(shape.center, shape.radius);
    case 'ellipsoid':
      return measureEllipsoid(shape.center, shape.radii);
    case 'cylinder':
      return measureCylinder(shape.from, shape.to, shape.radius);
    case 'surface':
      return measureSurface(inMetres(surfaces.get(shape.file)!, toSi(1, shape.unit)));
    case 'union': {
      const parts = shape.parts.map((part) => measureShape(part, surfaces));
      return {
        depth: (x, y, z) => {
          let deepest = -Infinity;
          for (const part of parts) deepest = Math.max(deepest, part.depth(x, y, z));
          return deepest;
        },
        min: bound(parts, 'min', Math.min),
        max: bound(parts, 'max', Math.max),
      };
    }
    case 'intersection': {
      const parts = shape.parts.map((part) => measureShape(part, surfaces));
      return {
        depth: (x, y, z) => {
          let shallowest = Infinity;
          for (const part of parts) shallowest = Math.min(shallowest, part.depth(x, y, z));
          return shallowest;
        },
        min: bound(parts, 'min', Math.max),
        max: bound(parts, 'max', Math.min),
      };
    }
    case 'difference':
      return without(
        measureShape(shape.of, surfaces),
        shape.minus.map((part) => measureShape(part, surfaces)),
      );
  }
}

function inMetres(surface: TriangleSurface, unit: number): TriangleSurface {
  return unit === 1 ? surface : { ...surface, position: surface.position.map((x) => x * unit) };
}

function without(of: Region, minus: readonly Region[]): Region {
  return {
    depth: (x, y, z) => {
      let depth = of.depth(x, y, z);
      for (const part of minus) depth = Math.min(depth, -part.depth(x, y, z));
      return depth;
    },
    min: of.min,
    max: of.max,
  };
}

function bound(parts: readonly Region[], side: 'min' | 'max', pick: (...of: number[]) => number): Triple {
  const along = (k: 0 | 1 | 2) => pick(...parts.map((part) => part[side][k]));
  return [along(0), along(1), along(2)];
}

function measureBox(min: Triple, max: Triple): Region {
  return {
    depth: (x, y, z) => {
      const dx = Math.min(x - min[0], max[0] - x);
      const dy = Math.min(y - min[1], max[1] - y);
      const dz = Math.min(z - min[2], max[2] - z);
      const least = Math.min(dx, dy, dz);
      return least >= 0 ? least : -Math.hypot(Math.min(dx, 0), Math.min(dy, 0), Math.min(dz, 0));
    },
    min,
    max,
  };
}

function measureSphere(center: Triple, radius: number): Region {
  return {
    depth: (x, y, z) => radius - Math.hypot(x - center[0], y - center[1], z - center[2]),
    min: [center[0] - radius, center[1] - radius, center[2] - radius],
    max: [center[0] + radius, center[1] + radius, center[2] + radius],
  };
}

/** A cylinder with flat ends. */
function measureCylinder(from: Triple, to: Triple, radius: number): Region {
  const height = Math.hypot(to[0] - from[0], to[1] - from[1], to[2] - from[2]);
  const axis: Triple = [(to[0] - from[0]) / height, (to[1] - from[1]) / height, (to[2] - from[2]) / height];
  // An end disc reaches radius × sin(angle to the coordinate axis) along each coordinate axis.
  const reach = (k: 0 | 1 | 2) => radius * Math.sqrt(Math.max(0, 1 - axis[k] * axis[k]));
  const low = (k: 0 | 1 | 2) => Math.min(from[k], to[k]) - reach(k);
  const high = (k: 0 | 1 | 2) => Math.max(from[k], to[k]) + reach(k);
  return {
    depth: (x, y, z) => {
      const dx = x - from[0];
      const dy = y - from[1];
      const dz = z - from[2];
      const along = dx * axis[0] + dy * axis[1] + dz * axis[2];
      const across = Math.hypot(dx - along * axis[0], dy - along * axis[1], dz - along * axis[2]);
      const side = radius - across;
      const end = Math.min(along, height - along);
      const least = Math.min(side, end);
      return least >= 0 ? least : -Math.hypot(Math.min(side, 0), Math.min(end, 0));
    },
    min: [low(0), low(1), low(2)],
    max: [high(0), high(1), high(2)],
  };
}

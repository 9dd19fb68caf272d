import type { Manifold, ManifoldToplevel } from 'manifold-3d';
import { inputError } from '../core/errors.ts';
import type { TriangleSurface } from '../core/surface.ts';
import { toSi } from '../core/units.ts';
import type { Shape, Triple } from '../spec/types.ts';

/** Segments round a sphere or a cylinder: flat parts lie at most 0.00008 radii inside the round shape. */
const ROUND = 256;
/** Solids are in millimetres, as their corners are held in single precision. */
export const PER_METRE = 1000;

/**
 * A tissue shape as a solid of flat faces.
 *
 * @param surfaces what was read of each surface file the shape names, in the files' own units
 * @throws InputError for a surface that bounds no solid
 */
export function shapeSolid(
  library: ManifoldToplevel,
  shape: Shape,
  surfaces: ReadonlyMap<string, TriangleSurface>,
): Manifold {
  const { Manifold } = library;
  const part = (of: Shape): Manifold => shapeSolid(library, of, surfaces);
  switch (shape.shape) {
    case 'box':
      return Manifold.cube(inMillimetres(shape.max, shape.min)).translate(inMillimetres(shape.min));
    case 'sphere':
      return Manifold.sphere(PER_METRE * shape.radius, ROUND).translate(inMillimetres(shape.center));
    case 'ellipsoid':
      return Manifold.sphere(1, ROUND).scale(inMillimetres(shape.radii)).translate(inMillimetres(shape.center));
    case 'cylinder':
      return cylinder(library, shape.from, shape.to, shape.radius);
    case 'surface': {
      const surface = surfaces.get(shape.file);
      if (surface === undefined)
        throw inputError('missing-surface', 'tissue', `got ${shape.file}, which was not read, expected a surface`);
      const scale = PER_METRE * toSi(1, shape.unit);
      return meshSolid(library, surface, scale, shape.file);
    }
    case 'union':
      return Manifold.union(shape.parts.map(part));
    case 'intersection':
      return Manifold.intersection(shape.parts.map(part));
    case 'difference':
      return Manifold.difference([part(shape.of), ...shape.minus.map(part)]);
  }
}

/** A closed surface as a solid. */
export function meshSolid(library: ManifoldToplevel, surface: TriangleSurface, scale: number, where: string): Manifold {
  try {
    return new library.Manifold(
      new library.Mesh({
        numProp: 3,
        vertProperties: Float32Array.from(surface.position, (x) => scale * x),
        triVerts: Uint32Array.from(surface.triangle),
      }),
    );
  } catch (error) {
    const why = error instanceof Error ? error.message : String(error);
    throw inputError('no-solid', where, `got a surface that bounds no solid (${why}), expected a closed one`);
  }
}

function cylinder(library: ManifoldToplevel, from: Triple, to: Triple, radius: number): Manifold {
  const [x, y, z] = [to[0] - from[0], to[1] - from[1], to[2] - from[2]];
  const length = Math.sqrt(x * x + y * y + z * z);
  // Turned from the z axis: down by the angle to it, then round it.
  const tilt = (Math.acos(Math.max(-1, Math.min(1, z / length))) * 180) / Math.PI;
  const round = (Math.atan2(y, x) * 180) / Math.PI;
  return library.Manifold.cylinder(PER_METRE * length, PER_METRE * radius, PER_METRE * radius, ROUND)
    .rotate([0, tilt, round])
    .translate(inMillimetres(from));
}

function inMillimetres(a: Triple, less: Triple = [0, 0, 0]): [number, number, number] {
  return [PER_METRE * (a[0] - less[0]), PER_METRE * (a[1] - less[1]), PER_METRE * (a[2] - less[2])];
}

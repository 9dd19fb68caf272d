import { InputError, inputError } from '../core/errors.ts';
import type { TriangleSurface } from '../core/surface.ts';
import { toSi } from '../core/units.ts';
import type { DemandPart, Shape } from '../spec/types.ts';
import { type CheckedSurface, checkSurface } from './check-surface.ts';
import { differenceOf, intersectionOf, unionOf } from './combine.ts';
import { ellipsoidRegion } from './ellipsoid.ts';
import { coverDemand, evenPerfusion, type Perfusion, type WeightedRegion, weighParts } from './perfusion.ts';
import { boxRegion, cylinderRegion, sphereRegion } from './primitives.ts';
import type { Region } from './region.ts';
import { surfaceRegion } from './surface-region.ts';
import type { Tissue } from './tissue.ts';
import { integrateDemand, integrateVolume } from './volume.ts';

/** Least share of its box that a tissue fills; less than this is taken as nothing. */
const LEAST_SHARE = 1e-9;

/**
 * Turns a shape into the tissue that vessels may fill.
 *
 * @param shape     in SI
 * @param surfaces  what was read of each surface file the shape and `forbidden` name, in the files' own units
 * @param forbidden parts that vessels keep out of
 * @param demand    parts whose demand is not 1
 * @throws  InputError naming the path of the shape (`tissue.parts[1]`) and, for surfaces, the file: a surface that is
 *          missing or does not bound a volume, a size that is not > 0, a tissue that is empty or demands nothing
 * Cost:    primitives nothing; a surface about 10 µs a triangle; a volume without closed form 2·10⁵ depths.
 */
export function buildTissue(
  shape: Shape,
  surfaces: ReadonlyMap<string, TriangleSurface>,
  forbidden: readonly Shape[] = [],
  demand: readonly DemandPart[] = [],
): Tissue {
  const builder = new Builder(surfaces);
  const of = builder.region(shape, 'tissue');
  const minus = forbidden.map((part, i) => builder.region(part, `forbidden[${i}]`));
  const parts = demand.map(({ shape: part, weight }, i) => ({
    region: builder.region(part, `tissue.demand[${i}]`),
    weight,
  }));
  if (builder.faults.length > 0) throw new InputError(builder.faults.flatMap((fault) => fault.faults));
  const region = differenceOf(of, minus);
  const { volume, error } = region.volume === null ? integrateVolume(region) : { volume: region.volume, error: 0 };
  const [dx, dy, dz] = [0, 1, 2].map((i) => region.max[i as 0] - region.min[i as 0]) as [number, number, number];
  if (!(volume > LEAST_SHARE * dx * dy * dz && volume > 0))
    throw inputError(
      'empty-tissue',
      'tissue',
      'got a tissue with no volume, expected parts that leave room for vessels',
    );
  const { min, max, convex, depth, deeperThan, holdsTube } = region;
  const perfusion = parts.length === 0 ? evenPerfusion(volume, error) : perfuse(region, parts);
  return { min, max, volume, volumeError: error, perfusion, convex, depth, deeperThan, holdsTube };
}

/** Demand over a region; refused where it is nothing. */
function perfuse(region: Region, parts: readonly WeightedRegion[]): Perfusion {
  const weighing = weighParts(parts);
  const cells = coverDemand(region, weighing);
  const { whole, error } = integrateDemand(region, weighing, cells);
  if (!(whole > 0))
    throw inputError(
      'no-demand',
      'tissue.demand',
      'got weights of 0 all over the tissue, expected a part of it that demands blood',
    );
  return { uniform: false, whole, error, cells, ...weighing };
}

/** Builds regions and gathers the faults of all of them. */
class Builder {
  readonly faults: InputError[] = [];
  private readonly surfaces: ReadonlyMap<string, TriangleSurface>;
  private readonly checked = new Map<string, CheckedSurface | null>();

  constructor(surfaces: ReadonlyMap<string, TriangleSurface>) {
    this.surfaces = surfaces;
  }

  region(shape: Shape, where: string): Region {
    const list = (shapes: readonly Shape[], key: string): Region[] => {
      if (shapes.length === 0 && key !== 'minus')
        this.refuse('out-of-range', `${where}.${key}`, 'got none, expected at least one');
      return shapes.map((part, i) => this.region(part, `${where}.${key}[${i}]`));
    };
    switch (shape.shape) {
      case 'box':
        for (const axis of [0, 1, 2] as const)
          this.positive(shape.max[axis] - shape.min[axis], `${where}.max[${axis}]`, 'an extent');
        return boxRegion(shape.min, shape.max);
      case 'sphere':
        this.positive(shape.radius, `${where}.radius`, 'a radius');
        return sphereRegion(shape.center, shape.radius);
      case 'ellipsoid':
        for (const axis of [0, 1, 2] as const) this.positive(shape.radii[axis], `${where}.radii[${axis}]`, 'a radius');
        return ellipsoidRegion(shape.center, shape.radii);
      case 'cylinder': {
        const [ux, uy, uz] = [0, 1, 2].map((i) => shape.to[i as 0] - shape.from[i as 0]) as [number, number, number];
        this.positive(shape.radius, `${where}.radius`, 'a radius');
        this.positive(Math.sqrt(ux * ux + uy * uy + uz * uz), `${where}.to`, 'a length');
        return cylinderRegion(shape.from, shape.to, shape.radius);
      }
      case 'surface':
        return this.surface(shape.file, shape.unit, where);
      case 'union': {
        const parts = list(shape.parts, 'parts');
        return parts.length === 0 ? NOWHERE : unionOf(parts);
      }
      case 'intersection': {
        const parts = list(shape.parts, 'parts');
        return parts.length === 0 ? NOWHERE : intersectionOf(parts);
      }
      case 'difference':
        return differenceOf(this.region(shape.of, `${where}.of`), list(shape.minus, 'minus'));
    }
  }

  private surface(file: string, unit: 'm' | 'mm' | 'um', where: string): Region {
    const surface = this.surfaces.get(file);
    if (surface === undefined) {
      this.refuse('missing-surface', `${where}.file`, `got ${file}, which was not read, expected a surface`);
      return NOWHERE;
    }
    let checked = this.checked.get(file);
    if (checked === undefined) {
      try {
        checked = checkSurface(surface, file);
      } catch (error) {
        if (!(error instanceof InputError)) throw error;
        this.faults.push(error);
        checked = null;
      }
      this.checked.set(file, checked);
    }
    if (checked === null) return NOWHERE;
    const position = surface.position.map((value) => toSi(value, unit));
    const factor = toSi(1, unit);
    const volume = checked.volume * factor * factor * factor;
    return surfaceRegion({ position, triangle: surface.triangle }, checked, volume);
  }

  private positive(value: number, where: string, what: string): void {
    if (!(value > 0 && value < Number.POSITIVE_INFINITY))
      this.refuse('out-of-range', where, `got ${what} of ${value} m, expected > 0`);
  }

  private refuse(code: string, where: string, message: string): void {
    this.faults.push(inputError(code, where, message));
  }
}

/** Stands in for a region that could not be built, so that the faults of the others are found too. */
const NOWHERE: Region = sphereRegion([0, 0, 0], 1);

import { fromSi } from '../core/units.ts';
import { SPEC_FORMAT } from './schema.ts';
import { type SolvedAgain, solvedAgainOut } from './solved-again.ts';
import type { InletSpec, Shape, SizingSpec, Spec, TerminalsSpec } from './types.ts';

/** What a written spec says of its writer. */
export interface SpecStamp {
  /** Layout of the file; the one of this version unless given. */
  readonly format?: number | undefined;
  /** Version of the program. */
  readonly version?: string | undefined;
  /** What was changed in the tree after it was grown. */
  readonly solvedAgain?: SolvedAgain | null | undefined;
}

/**
 * A spec as JSON text with every default filled in and SI keys only; the same spec gives the same text.
 *
 * `parseSpec` of it gives equal numbers to the last bit for every spec that came from `parseSpec`. In a spec built by
 * hand the least junction angle may come back one unit in the last place off: one double in ten is no number of degrees
 * times π/180. Angles that did come from degrees are undone by division exactly (3·10⁶ random ones from 15° to 60°).
 */
export function specToJson(spec: Spec, stamp: SpecStamp = {}): string {
  const { density, maintenance, viscosity } = spec.blood;
  const tissue = {
    ...shapeOut(spec.tissue),
    ...(spec.forbidden.length > 0 ? { forbidden: spec.forbidden.map(shapeOut) } : {}),
    ...(spec.demand === undefined
      ? {}
      : { demand: spec.demand.map(({ shape, weight }) => ({ ...shapeOut(shape), weight })) }),
  };
  const value = {
    format: stamp.format ?? SPEC_FORMAT,
    version: stamp.version,
    name: spec.name,
    purpose: spec.purpose,
    seed: spec.seed,
    tissue,
    trees: spec.trees.map((tree) => ({
      name: tree.name,
      kind: tree.kind,
      inlet: inletOut(tree.inlet),
      terminals: terminalsOut(tree.terminals),
    })),
    blood: { viscosity: { law: viscosity.law, value_Pa_s: viscosity.value }, density_kg_m3: density },
    sizing: sizingOut(spec.sizing, maintenance),
    clearance: { gap_m: spec.clearance.gap },
    junctions: { min_angle_deg: fromSi(spec.junctions.minAngle, 'deg') },
    refine: spec.refine,
    solved_again: solvedAgainOut(stamp.solvedAgain),
  };
  return `${layOut(value, '')}\n`;
}

function inletOut(inlet: InletSpec): object {
  return {
    position_m: inlet.position,
    direction: inlet.direction ?? undefined,
    pressure_Pa: inlet.pressure,
    flow_m3_s: inlet.flow,
  };
}

function terminalsOut(terminals: TerminalsSpec): object {
  const pressure_Pa = terminals.pressure ?? undefined;
  const flow_share = terminals.byTerritory ? 'territory' : undefined;
  if (terminals.by === 'count') return { count: terminals.count, flow_share, pressure_Pa };
  if (terminals.by === 'spacing') return { spacing_m: terminals.spacing, flow_share, pressure_Pa };
  return { points_m: terminals.points, flow_share: flow_share ?? terminals.share, pressure_Pa };
}

function sizingOut(sizing: SizingSpec, maintenance: number): object {
  const out = { rule: sizing.rule, maintenance_W_m3: maintenance };
  if (sizing.rule === 'least-power') return out;
  const scaled = { ...out, junction_exponent: sizing.exponent };
  if (sizing.rule === 'pressure-matched' || sizing.scale.by === 'mean-pressure') return scaled;
  const { by, radius } = sizing.scale;
  return by === 'terminal-radius' ? { ...scaled, terminal_radius_m: radius } : { ...scaled, inlet_radius_m: radius };
}

function shapeOut(shape: Shape): object {
  switch (shape.shape) {
    case 'box':
      return { shape: 'box', min_m: shape.min, max_m: shape.max };
    case 'sphere':
      return { shape: 'sphere', center_m: shape.center, radius_m: shape.radius };
    case 'ellipsoid':
      return { shape: 'ellipsoid', center_m: shape.center, radii_m: shape.radii };
    case 'cylinder':
      return { shape: 'cylinder', from_m: shape.from, to_m: shape.to, radius_m: shape.radius };
    case 'surface':
      return { shape: 'surface', file: shape.file, unit: shape.unit };
    case 'union':
    case 'intersection':
      return { shape: shape.shape, parts: shape.parts.map(shapeOut) };
    case 'difference':
      return { shape: 'difference', of: shapeOut(shape.of), minus: shape.minus.map(shapeOut) };
  }
}

/** JSON with two spaces a level and lists of plain values, and points, on one line each. */
function layOut(value: unknown, indent: string): string {
  if (typeof value !== 'object' || value === null) return JSON.stringify(value);
  const deeper = `${indent}  `;
  if (Array.isArray(value)) {
    if (value.every((one) => typeof one !== 'object' || one === null)) {
      return `[${value.map((one) => JSON.stringify(one)).join(', ')}]`;
    }
    return `[\n${value.map((one) => deeper + layOut(one, deeper)).join(',\n')}\n${indent}]`;
  }
  const entries = Object.entries(value).filter(([, one]) => one !== undefined);
  return `{\n${entries.map(([key, one]) => `${deeper}${JSON.stringify(key)}: ${layOut(one, deeper)}`).join(',\n')}\n${indent}}`;
}

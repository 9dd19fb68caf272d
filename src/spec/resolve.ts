import { equalShares, normaliseDirection, normaliseShares } from './normalise.ts';
import { DRAIN_PRESSURE, defaultTreeName, SUPPLY_PRESSURE, TERMINAL_PRESSURE } from './rules.ts';
import type { Judged } from './schema.ts';
import type { DemandPart, InletSpec, Shape, SizingSpec, Spec, TerminalsSpec, TreeSpec } from './types.ts';

/** The resolved spec of a value the schema found faultless. */
export function resolveSpec(judged: Judged): Spec {
  const { sizing, blood } = judged;
  return {
    name: judged.name,
    ...(judged.purpose === undefined ? {} : { purpose: judged.purpose }),
    seed: String(judged.seed),
    tissue: plainShape(judged.tissue),
    forbidden: judged.tissue.forbidden.map(plainShape),
    ...(judged.tissue.demand.length === 0 ? {} : { demand: judged.tissue.demand.map(plainDemand) }),
    trees: judged.trees.map((tree, row) => resolveTree(tree, row, sizing.rule === 'least-power')),
    blood: {
      viscosity: { law: 'constant', value: blood.viscosity.value },
      density: blood.density,
      maintenance: sizing.maintenance,
    },
    sizing: resolveSizing(sizing),
    clearance: { gap: judged.clearance.gap },
    junctions: { minAngle: judged.junctions.min_angle },
    refine: judged.refine,
  };
}

function resolveTree(tree: Judged['trees'][number], row: number, leastPower: boolean): TreeSpec {
  const { kind, inlet } = tree;
  const resolved: InletSpec = {
    position: inlet.position,
    direction: inlet.direction === undefined ? null : normaliseDirection(inlet.direction),
    pressure: inlet.pressure ?? (kind === 'drain' ? DRAIN_PRESSURE : SUPPLY_PRESSURE),
    flow: inlet.flow,
  };
  return {
    name: tree.name ?? defaultTreeName(row, kind),
    kind,
    inlet: resolved,
    terminals: resolveTerminals(tree.terminals, leastPower),
  };
}

function resolveTerminals(terminals: Judged['trees'][number]['terminals'], leastPower: boolean): TerminalsSpec {
  const { count, spacing, points, flow_share: share } = terminals;
  const pressure = terminals.pressure ?? (leastPower ? null : TERMINAL_PRESSURE);
  const shared = share === 'territory' ? ({ byTerritory: true } as const) : {};
  if (count !== undefined) return { by: 'count', count, pressure, ...shared };
  if (spacing !== undefined) return { by: 'spacing', spacing, pressure, ...shared };
  const all = points ?? [];
  const shares = typeof share === 'object' ? normaliseShares(share) : equalShares(all.length);
  return { by: 'points', points: all, share: shares, pressure, ...shared };
}

function resolveSizing(sizing: Judged['sizing']): SizingSpec {
  const { rule, terminal_radius: terminal, inlet_radius: inlet } = sizing;
  if (rule === 'least-power') return { rule };
  const exponent = sizing.junction_exponent ?? 3;
  if (rule === 'pressure-matched') return { rule, exponent };
  if (terminal !== undefined) return { rule, exponent, scale: { by: 'terminal-radius', radius: terminal } };
  if (inlet !== undefined) return { rule, exponent, scale: { by: 'inlet-radius', radius: inlet } };
  return { rule, exponent, scale: { by: 'mean-pressure' } };
}

function plainDemand(part: Shape & { readonly weight: number }): DemandPart {
  return { shape: plainShape(part), weight: part.weight };
}

/** A shape without what only the whole tissue has beside it. */
function plainShape(shape: Shape): Shape {
  switch (shape.shape) {
    case 'box':
      return { shape: 'box', min: shape.min, max: shape.max };
    case 'sphere':
      return { shape: 'sphere', center: shape.center, radius: shape.radius };
    case 'ellipsoid':
      return { shape: 'ellipsoid', center: shape.center, radii: shape.radii };
    case 'cylinder':
      return { shape: 'cylinder', from: shape.from, to: shape.to, radius: shape.radius };
    case 'surface':
      return { shape: 'surface', file: shape.file, unit: shape.unit };
    case 'union':
    case 'intersection':
      return { shape: shape.shape, parts: shape.parts.map(plainShape) };
    case 'difference':
      return { shape: 'difference', of: plainShape(shape.of), minus: shape.minus.map(plainShape) };
  }
}

import type { Random } from '../../src/core/random.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { Spec } from '../../src/spec/types.ts';

type Json = Record<string, unknown>;

/** A random small spec: any analytic shape, rule, count of terminals and density that a user might write down. */
export function randomSpec(random: Random, seed: string, most = 60): Spec {
  const pick = <T>(list: readonly T[]): T => list[Math.floor(random.next() * list.length)]!;
  const between = (a: number, b: number) => a + (b - a) * random.next();
  const { tissue, inlet, direction, volume, forbidden } = pick([box, ball, lobe, shell, block, cylinder, barred])(
    between,
  );
  const rule = pick(['least-power', 'junction-exponent', 'junction-exponent', 'pressure-matched']);
  const sizing: Json = { rule };
  if (rule !== 'least-power') sizing.junction_exponent = Number(between(2.2, 3.4).toFixed(2));
  const size = Math.cbrt(volume);
  if (rule === 'junction-exponent' && random.next() < 0.5) sizing.inlet_radius_um = Math.round(between(8, 40) * size);
  // Least-power radii go with the cube root of flow: a first vessel of 1 to 5 % of the tissue's size.
  const radius = between(0.01, 0.05) * size * 1e-3;
  const flow = (radius * radius * radius * Math.PI * Math.sqrt(625 / 0.0035)) / 4;
  const drop = rule === 'least-power' ? 40 : between(10, 80);
  const terminals: Json =
    random.next() < 0.75
      ? { count: 1 + Math.floor(random.next() * most) }
      : { spacing_um: Math.round(1000 * size * between(0.25, 0.6)) };
  terminals.pressure_mmHg = 20;
  return specFromValue({
    name: 'random',
    seed,
    tissue: forbidden === undefined ? tissue : { ...tissue, forbidden },
    trees: [
      {
        inlet: {
          position_mm: inlet,
          ...(random.next() < 0.7 ? { direction } : {}),
          pressure_mmHg: Number((20 + drop).toFixed(3)),
          flow_mL_min: Number((flow * 60e6).toPrecision(4)),
        },
        terminals,
      },
    ],
    sizing,
    clearance: { gap_um: pick([0, 0, 5, 20]) },
    junctions: { min_angle_deg: pick([25, 25, 30, 40]) },
    refine: pick(['none', 'quick', 'quick']),
  });
}

type Between = (a: number, b: number) => number;
interface Place {
  readonly tissue: Json;
  readonly inlet: readonly number[];
  readonly direction: readonly number[];
  /** mm³, about. */
  readonly volume: number;
  readonly forbidden?: readonly Json[];
}

function box(between: Between): Place {
  const [x, y, z] = [between(4, 12), between(4, 12), between(4, 12)];
  return {
    tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [x, y, z] },
    inlet: [0, y / 2, z / 2],
    direction: [1, 0, 0],
    volume: x * y * z,
  };
}

function ball(between: Between): Place {
  const r = between(3, 8);
  return {
    tissue: { shape: 'sphere', center_mm: [1, 2, 3], radius_mm: r },
    inlet: [1 - r, 2, 3],
    direction: [1, 0, 0],
    volume: 4.2 * r * r * r,
  };
}

function lobe(between: Between): Place {
  const r = between(4, 8);
  return {
    tissue: {
      shape: 'union',
      parts: [
        { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [r, 0.7 * r, 0.6 * r] },
        { shape: 'ellipsoid', center_mm: [0.7 * r, 0.3 * r, 0], radii_mm: [0.6 * r, 0.6 * r, 0.5 * r] },
      ],
    },
    inlet: [-r, 0, 0],
    direction: [1, 0, 0],
    volume: 2 * r * r * r,
  };
}

function shell(between: Between): Place {
  const r = between(5, 9);
  const wall = between(0.25, 0.4) * r;
  return {
    tissue: {
      shape: 'difference',
      of: { shape: 'sphere', center_mm: [0, 0, 0], radius_mm: r },
      minus: [
        { shape: 'sphere', center_mm: [0, 0, 0], radius_mm: r - wall },
        { shape: 'box', min_mm: [-20, -20, -20], max_mm: [20, 20, -0.4 * r] },
      ],
    },
    inlet: [0, 0, r],
    direction: [0.9, 0, -0.5],
    // Half of it, so that trunks are slim enough for the wall.
    volume: 0.4 * wall * wall * wall * 8,
  };
}

function block(between: Between): Place {
  const x = between(6, 12);
  return {
    tissue: {
      shape: 'difference',
      of: { shape: 'box', min_mm: [0, 0, 0], max_mm: [x, x, 0.6 * x] },
      minus: [{ shape: 'cylinder', from_mm: [x / 2, x / 2, -1], to_mm: [x / 2, x / 2, x], radius_mm: 0.18 * x }],
    },
    inlet: [0, x / 2, 0.3 * x],
    direction: [1, 0, 0],
    volume: 0.25 * x * x * x,
  };
}

function cylinder(between: Between): Place {
  const r = between(2.5, 5);
  const l = between(5, 14);
  return {
    tissue: { shape: 'cylinder', from_mm: [0, 0, 0], to_mm: [0, 0, l], radius_mm: r },
    inlet: [0, 0, 0],
    direction: [0, 0, 1],
    volume: 3.14 * r * r * l,
  };
}

/** A box with a part that vessels keep out of, in the way of a straight trunk. */
function barred(between: Between): Place {
  const x = between(6, 12);
  return {
    tissue: { shape: 'box', min_mm: [0, 0, 0], max_mm: [x, x, x] },
    forbidden: [{ shape: 'sphere', center_mm: [0.6 * x, 0.5 * x, 0.5 * x], radius_mm: 0.22 * x }],
    inlet: [0, x / 2, x / 2],
    direction: [1, 0, 0],
    volume: 0.3 * x * x * x,
  };
}

import { readFileSync } from 'node:fs';
import { resolve } from 'node:path';
import { InputError } from '../../src/core/errors.ts';
import type { TriangleSurface } from '../../src/core/surface.ts';
import { decodeSurface } from '../../src/formats/surface/surface-formats.ts';
import { freezeGrowth } from '../../src/growth/freeze.ts';
import { growForest } from '../../src/growth/grow.ts';
import { growRun } from '../../src/run.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { Spec } from '../../src/spec/types.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { vesselVolume } from './figures.ts';

/* Five tissues × three sizing rules × how much of the tissue is vessel: do all promises hold in every cell? */

interface TissueCase {
  readonly shape: object;
  readonly inlet: readonly [number, number, number];
  readonly direction: readonly [number, number, number];
}

const box = { shape: 'box', min_mm: [0, 0, 0], max_mm: [20, 20, 20] };
const drill = (from: number[], to: number[]) => ({ shape: 'cylinder', from_mm: from, to_mm: to, radius_mm: 2.5 });

export const TISSUES = {
  box: { shape: box, inlet: [0, 10, 10], direction: [1, 0, 0] },
  ellipsoid: {
    shape: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [15, 12, 10] },
    inlet: [-15, 0, 0],
    direction: [1, 0, 0],
  },
  hollow: {
    shape: {
      shape: 'intersection',
      parts: [
        {
          shape: 'difference',
          of: { shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [20, 20, 26] },
          minus: [{ shape: 'ellipsoid', center_mm: [0, 0, 0], radii_mm: [13, 13, 19] }],
        },
        { shape: 'box', min_mm: [-25, -25, -30], max_mm: [25, 25, 0] },
      ],
    },
    inlet: [16.5, 0, 0],
    direction: [0, 0, -1],
  },
  bean: { shape: { shape: 'surface', file: 'bean.stl', unit: 'mm' }, inlet: [0, -3.8, 0], direction: [0, 1, 0] },
  // A block with three holes drilled through it that cross in the middle: not simply connected.
  holed: {
    shape: {
      shape: 'difference',
      of: box,
      minus: [drill([-1, 10, 10], [21, 10, 10]), drill([10, -1, 10], [10, 21, 10]), drill([10, 10, -1], [10, 10, 21])],
    },
    inlet: [0, 4, 4],
    direction: [1, 0, 0],
  },
} as const satisfies Record<string, TissueCase>;
export type TissueName = keyof typeof TISSUES;

export const RULES = ['least-power', 'junction-exponent', 'pressure-matched'] as const;
export type Rule = (typeof RULES)[number];

export interface Cell {
  readonly tissue: TissueName;
  readonly rule: Rule;
  /** Part of the tissue that is to be vessel, about. */
  readonly volume: number;
}

let bean: ReadonlyMap<string, TriangleSurface> | null = null;

/** Surfaces that the tissues name; read from the folder of presets below the working folder. */
export function cellSurfaces(): ReadonlyMap<string, TriangleSurface> {
  bean ??= new Map([['bean.stl', decodeSurface(readFileSync(resolve('presets/bean.stl')), 'bean.stl')]]);
  return bean;
}

/**
 * @param size what sets how wide vessels are: mL/min of the inlet, or, for a junction exponent, µm of its radius
 */
export function cellSpec({ tissue, rule }: Cell, size: number, terminals: number, seed: string, refine = 'none'): Spec {
  const { shape, inlet, direction } = TISSUES[tissue];
  return specFromValue({
    name: `${tissue} ${rule}`,
    seed,
    tissue: shape,
    trees: [
      {
        inlet: {
          position_mm: inlet,
          direction,
          pressure_mmHg: 60,
          flow_mL_min: rule === 'junction-exponent' ? 5 : size,
        },
        terminals: { count: terminals, ...(rule === 'pressure-matched' ? { pressure_mmHg: 25 } : {}) },
      },
    ],
    sizing:
      rule === 'least-power'
        ? { rule, maintenance_W_m3: 625 }
        : {
            rule,
            junction_exponent: rule === 'pressure-matched' ? 3 : 2.7,
            ...(rule === 'junction-exponent' ? { inlet_radius_um: size } : {}),
          },
    clearance: { gap_um: 10 },
    refine,
  });
}

/** d log size / d log volume: volume goes with Q^(2/3), with r², and, where pressures are asked for, with Q^(1/2). */
const SLOPE = { 'least-power': 1.5, 'junction-exponent': 0.5, 'pressure-matched': 2 } as const;
const START = { 'least-power': 5, 'junction-exponent': 700, 'pressure-matched': 20 } as const;

/**
 * Finds the size that gives a cell about its vessel volume, by growing it a few times. Where a first vessel so wide finds
 * no room in the tissue, the widest that was found to.
 */
export function findSize(cell: Cell, terminals: number): number {
  const { rule, volume } = cell;
  let size = START[rule] * (volume / 0.05) ** SLOPE[rule];
  if (cell.tissue === 'bean') size *= { 'least-power': 0.05, 'junction-exponent': 0.4, 'pressure-matched': 0.02 }[rule];
  let best = { size: Number.NaN, miss: Number.POSITIVE_INFINITY };
  let most = Number.POSITIVE_INFINITY;
  for (let round = 0; round < 6 && best.miss > 0.04; round++) {
    const share = shareAt(cell, size, terminals);
    if (share === null) {
      most = Math.min(most, size);
      const low = Number.isNaN(best.size) ? 0.25 * size : best.size;
      size = Math.sqrt(low * most);
      continue;
    }
    const ratio = volume / share;
    const miss = Math.abs(Math.log(ratio));
    if (miss < best.miss) best = { size, miss };
    const next = size * Math.min(8, Math.max(0.1, ratio)) ** SLOPE[rule];
    size = next < most ? next : Math.sqrt(size * most);
  }
  return Number(best.size.toPrecision(4));
}

/** Part of the tissue that is vessel; null where the first vessel finds no room, or hardly a terminal does. */
function shareAt(cell: Cell, size: number, terminals: number): number | null {
  const spec = cellSpec(cell, size, terminals, 'search');
  const tissue = buildTissue(spec.tissue, cellSurfaces());
  try {
    const { grower } = growForest(spec, tissue);
    return grower.served < 0.5 * terminals ? null : vesselVolume(freezeGrowth(grower, spec)) / tissue.volume;
  } catch (error) {
    if (error instanceof InputError) return null;
    throw error;
  }
}

export interface CellRun {
  readonly served: number;
  readonly volume: number;
  /** Everything the check found broken, but that terminals are missing: how many things of which promise. */
  readonly broken: string[];
}

export function runCell(cell: Cell, size: number, terminals: number, seed: string, refine = 'none'): CellRun {
  const spec = cellSpec(cell, size, terminals, seed, refine);
  const { record, check, tissue } = growRun(spec, cellSurfaces());
  const { forest } = record;
  const isParent = new Uint8Array(forest.count);
  for (let i = 0; i < forest.count; i++) if (forest.parent[i]! >= 0) isParent[forest.parent[i]!] = 1;
  let served = 0;
  for (let i = 0; i < forest.count; i++) served += 1 - isParent[i]!;
  return {
    served,
    volume: vesselVolume(forest) / tissue.volume,
    broken: check.promises
      .filter(({ id, held }) => held === false && id !== 'terminals')
      .map(({ id, failures, worst, limit }) => `${failures} × ${id} (worst ${worst}, limit ${limit})`),
  };
}

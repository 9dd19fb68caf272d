import { spawnSync } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { ROOT } from './program.ts';

/*
 * Ten small trees, invented, whose meshes are handed to an independent flow solver: other tissues, sizing rules, exponents and
 * numbers of terminals, 3 to 16 caps, vessels as short as junctions allow, Reynolds numbers below 2.
 */

const box = (x: number, y: number, z: number) => ({ shape: 'box', min_mm: [0, 0, 0], max_mm: [x, y, z] });
const ellipsoid = (x: number, y: number, z: number) => ({
  shape: 'ellipsoid',
  center_mm: [0, 0, 0],
  radii_mm: [x, y, z],
});
const ball = (radius: number) => ({ shape: 'sphere', center_mm: [0, 0, 0], radius_mm: radius });
const exponent = (junction_exponent: number, inlet_radius_um: number) => ({
  rule: 'junction-exponent',
  junction_exponent,
  inlet_radius_um,
});

/** Specs by name, in order of their caps. */
export const JUDGED_TREES: Readonly<Record<string, object>> = {
  'box-2': {
    tissue: box(8, 6, 6),
    trees: [{ inlet: { position_mm: [0, 3, 3], direction: [1, 0, 0], flow_uL_min: 60 }, terminals: { count: 2 } }],
    sizing: exponent(3, 420),
  },
  'ball-3': {
    tissue: ball(4),
    trees: [
      {
        inlet: { position_mm: [-4, 0, 0], flow_uL_min: 80, pressure_mmHg: 40 },
        terminals: { count: 3, pressure_mmHg: 39.9 },
      },
    ],
    sizing: { rule: 'pressure-matched', junction_exponent: 2.7 },
  },
  'slab-4': {
    tissue: box(12, 9, 3),
    trees: [{ inlet: { position_mm: [0, 4.5, 1.5], direction: [1, 0, 0], flow_uL_min: 50 }, terminals: { count: 4 } }],
    sizing: exponent(2.3, 480),
  },
  'egg-5': {
    tissue: ellipsoid(6, 4, 3),
    trees: [{ inlet: { position_mm: [-6, 0, 0], flow_uL_min: 40 }, terminals: { count: 5, flow_share: 'territory' } }],
    sizing: { rule: 'least-power', maintenance_W_m3: 15 },
  },
  'rod-6': {
    tissue: { shape: 'cylinder', from_mm: [0, 0, 0], to_mm: [14, 0, 0], radius_mm: 3 },
    trees: [{ inlet: { position_mm: [0, 0, 0], direction: [1, 0, 0], flow_uL_min: 60 }, terminals: { count: 6 } }],
    sizing: exponent(3.3, 450),
  },
  'drain-7': {
    tissue: box(9, 9, 9),
    trees: [
      {
        kind: 'drain',
        inlet: { position_mm: [4.5, 4.5, 0], direction: [0, 0, 1], flow_uL_min: 50, pressure_mmHg: 5 },
        terminals: { count: 7, pressure_mmHg: 5.03 },
      },
    ],
    sizing: { rule: 'pressure-matched', junction_exponent: 3 },
  },
  'lens-8': {
    tissue: ellipsoid(7, 7, 2.5),
    trees: [{ inlet: { position_mm: [-7, 0, 0], flow_uL_min: 60 }, terminals: { count: 8 } }],
    sizing: { rule: 'least-power', maintenance_W_m3: 25 },
  },
  'points-9': {
    tissue: box(10, 10, 6),
    trees: [
      {
        inlet: { position_mm: [0, 5, 3], direction: [1, 0, 0], flow_uL_min: 50 },
        terminals: {
          points_mm: [
            ...[
              [9, 2, 1],
              [9, 5, 5],
              [9, 8, 2],
              [6, 1, 4.5],
              [6, 9, 4.5],
            ],
            ...[
              [4, 8.5, 1],
              [4, 1.5, 1.2],
              [7, 5, 0.8],
              [3, 4, 5.3],
            ],
          ],
          flow_share: [4, 1, 2, 1, 0.5, 1, 1, 3, 0.3],
        },
      },
    ],
    sizing: { rule: 'junction-exponent', junction_exponent: 2.6, terminal_radius_um: 210 },
  },
  'cup-12': {
    tissue: { shape: 'difference', of: ball(6), minus: [ball(3)] },
    trees: [{ inlet: { position_mm: [0, 0, -6], flow_uL_min: 60 }, terminals: { count: 12 } }],
    sizing: exponent(2.5, 480),
  },
  'block-15': {
    tissue: box(12, 12, 8),
    trees: [
      {
        inlet: { position_mm: [0, 6, 4], direction: [1, 0, 0], flow_uL_min: 60, pressure_mmHg: 30 },
        terminals: { count: 15, pressure_mmHg: 29.98 },
      },
    ],
    sizing: { rule: 'pressure-matched', junction_exponent: 3 },
  },
};

const PYTHON = '/usr/bin/python3';
const MESHER = 'tetgen';

/** What the judge found of one mesh folder: relative differences, a number for each cap but the root's. */
export interface Judged {
  readonly unknowns: number;
  readonly triangles: number;
  readonly patches: readonly string[];
  readonly reynolds: number;
  readonly stated_lengths: 'axis' | 'effective';
  readonly drop_Pa: readonly number[];
  /** Drop by the pressures of boundary.csv over that of the solution, less 1. */
  readonly stated: readonly number[];
  readonly effective: Compared;
  readonly axis: Compared;
  readonly seconds: number;
  readonly memory_GB: number;
}

interface Compared {
  /** Network's drop over the solution's, less 1, for the flows of the table. */
  readonly drop: readonly number[];
  /** Share of the root's flow in the solution over that of the network, less 1, for the network's pressures. */
  readonly share: readonly number[];
}

/** Whether dolfin and TetGen are installed. */
export function hasJudge(): boolean {
  const mesher = spawnSync(MESHER, ['-h']).error === undefined;
  return mesher && spawnSync(PYTHON, ['-c', 'import dolfin, petsc4py']).status === 0;
}

/**
 * Grows and meshes one of the trees by the built program, 24 segments round, and has its mesh judged. Long triangles spare
 * half the memory; a straight tube conducts 0.4 % more than the law says with them and without.
 *
 * @param root of the repository; a bundled bench does not know where it was
 */
export function judgeTree(name: string, folder: string, root = ROOT): Judged {
  const program = join(root, 'dist/cli/main.js');
  const run = (command: string, ...words: string[]): string => {
    const { stdout, stderr, status } = spawnSync(command, words, { cwd: folder, encoding: 'utf8', maxBuffer: 1 << 28 });
    if (status !== 0) throw new Error(`${words.join(' ')}: ${stdout}${stderr}`);
    return stdout;
  };
  writeFileSync(join(folder, `${name}.json`), JSON.stringify({ name, seed: name, ...JUDGED_TREES[name] }));
  run(process.execPath, program, 'grow', `${name}.json`, '--out', `run-${name}`, '--quiet');
  run(
    process.execPath,
    program,
    'mesh',
    `run-${name}`,
    '--out',
    name,
    '--lengths',
    'effective',
    '--stretch',
    '2',
    '--quiet',
  );
  const lines = run(PYTHON, join(root, 'tests/integration/judge-flow.py'), name).trim().split('\n');
  return JSON.parse(lines.at(-1)!);
}

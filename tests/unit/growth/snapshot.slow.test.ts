import { describe, expect, test } from 'vitest';
import { splitTreePath } from '../../../src/formats/tree-formats.ts';
import { growForest } from '../../../src/growth/grow.ts';
import { type GrowOptions, growRun } from '../../../src/run.ts';
import { specFromValue } from '../../../src/spec/parse.ts';
import type { Spec } from '../../../src/spec/types.ts';
import { buildTissue } from '../../../src/tissue/build-tissue.ts';
import { openBytes, savedBytes } from '../../support/saved-states.ts';

/* Saved at any moment and gone on with from its bytes alone, a run comes to the same tree file as one that never stopped. */

const BOX = { shape: 'box', min_mm: [0, 0, 0], max_mm: [10, 8, 6] };
const LEFT = { position_mm: [0, 4, 3], direction: [1, 0, 0], flow_mL_min: 0.4, pressure_mmHg: 60 };
const RIGHT = { position_mm: [10, 4, 3], direction: [-1, 0, 0], flow_mL_min: 0.4, pressure_mmHg: 5 };

function points(count: number): number[][] {
  const list: number[][] = [];
  for (let k = 1; k <= count; k++) {
    list.push([9.2 * ((k * 0.8191725) % 1) + 0.4, 7.2 * ((k * 0.6710436) % 1) + 0.4, 5.2 * ((k * 0.5497) % 1) + 0.4]);
  }
  return list;
}

const SPECS: Record<string, unknown> = {
  'a count, least power': {
    tissue: BOX,
    trees: [{ inlet: LEFT, terminals: { count: 160 } }],
  },
  'a spacing, mean pressure': {
    tissue: BOX,
    trees: [{ inlet: LEFT, terminals: { spacing_mm: 1.1, pressure_mmHg: 20 } }],
    sizing: { rule: 'junction-exponent', junction_exponent: 2.7 },
    clearance: { gap_um: 20 },
  },
  'points, pressure matched': {
    tissue: BOX,
    trees: [{ inlet: LEFT, terminals: { points_mm: points(90), pressure_mmHg: 25 } }],
    sizing: { rule: 'pressure-matched' },
  },
  'two trees, demand and territories, annealed': {
    tissue: { ...BOX, demand: [{ shape: 'sphere', center_mm: [6, 4, 3], radius_mm: 2, weight: 5 }] },
    trees: [
      { name: 'in', inlet: LEFT, terminals: { count: 70, flow_share: 'territory', pressure_mmHg: 25 } },
      {
        name: 'out',
        kind: 'drain',
        inlet: RIGHT,
        terminals: { count: 80, flow_share: 'territory', pressure_mmHg: 15 },
      },
    ],
    sizing: { rule: 'pressure-matched' },
  },
  'a hollow tissue, many sweeps': {
    tissue: {
      shape: 'difference',
      of: { shape: 'sphere', center_mm: [5, 4, 3], radius_mm: 5 },
      minus: [{ shape: 'sphere', center_mm: [5, 4, 3], radius_mm: 2.5 }],
    },
    trees: [
      { inlet: { position_mm: [0, 4, 3], flow_mL_min: 0.3 }, terminals: { count: 120, flow_share: 'territory' } },
    ],
    refine: 40,
  },
};

function grow(spec: Spec, options: GrowOptions = {}): Uint8Array {
  const { record } = growRun(spec, new Map(), options);
  return splitTreePath('tree.vtp', 'tree.vtp').format.encode(record)[0]!.bytes;
}

describe.each(Object.keys(SPECS))('%s', (name) => {
  const refine = name.endsWith('annealed') ? 'annealed' : name.startsWith('a count') ? 'thorough' : undefined;
  const spec = specFromValue({ refine, ...(SPECS[name] as object) });
  const whole = grow(spec);
  const states: Uint8Array[] = [];
  const watched = grow(spec, { onMoment: (save) => states.push(savedBytes(save)) });

  test('being saved changes nothing', () => {
    expect(states.length).toBeGreaterThan(8);
    expect(Buffer.compare(watched, whole)).toBe(0);
  });

  test('from each moment it comes to the same bytes', () => {
    // All of them take long; some of growth, the beginning of refinement, and some of refinement.
    const chosen = states.filter((_, k) => k % Math.ceil(states.length / 8) === 0 || k === states.length - 1);
    for (const state of chosen) {
      const resumed = grow(spec, { resume: openBytes(state) });
      expect([states.indexOf(state), Buffer.compare(resumed, whole)]).toEqual([states.indexOf(state), 0]);
    }
  });

  test('saved again on the way, as often as one likes', () => {
    let state = states[0]!;
    for (let times = 0; ; times++) {
      let moments = 0;
      let next: Uint8Array | null = null;
      const resumed = grow(spec, {
        resume: openBytes(state),
        onMoment: (save) => {
          if (++moments === 7) next = savedBytes(save);
        },
      });
      expect([times, Buffer.compare(resumed, whole)]).toEqual([times, 0]);
      if (next === null) break;
      state = next;
    }
  });
});

/**
 * Fields of what is saved. A field whose value outlives a step must be in the state; who adds one decides here where it
 * belongs, and saves it if it must be.
 */
const SAVED = {
  grower: 'forest settler refresher finishes',
  server: '',
  refresher: 'nextRefresh nextSweep nextResize nextShare begun',
  settler: 'mended',
  forest: 'builder room trees sites cramped',
  tree: 'demand resizer full',
  sites: 'siteOf',
  builder: 'count parent child tree position load weight roots inletRadius free',
  room: 'reserve',
  demand: `wanted served site territory stream waiting dropped due tries x y z shares fresh places failures measured
    minDepth`,
  resizer: 'exact fall rise history',
};
/** Made again from spec, guess and tissue, or filled anew before each use. */
const FOLLOWS = {
  grower: 'attacher server options',
  server: 'forest attacher options crew batch',
  refresher: 'forest settler attacher sweeper rehanger onForest',
  settler: 'forest builder room headroom',
  forest: 'wanted tissue',
  tree: 'seedling resized planted builder index',
  sites: '',
  builder: 'exponent memory cutTree cutWhole',
  room: `builder tissue limits refusal blocker pinned exempt slack listed pending stamp round touched fresh memory grid
    floor wall span`,
  demand: 'by byTerritory',
  resizer: 'spec tree drop',
};

function names(list: string): string[] {
  return list.split(/\s+/).filter((name) => name !== '');
}

describe('every field is saved or follows from what is', () => {
  const spec = specFromValue({ tissue: BOX, trees: [{ inlet: LEFT, terminals: { count: 20 } }] });
  const { grower } = growForest(spec, buildTissue(spec.tissue, new Map()));
  const { server, refresher, settler } = grower as unknown as Record<'server' | 'refresher' | 'settler', object>;
  const { forest } = grower;
  const { builder, room, sites } = forest;
  const tree = forest.trees[0]!;
  const { demand, resizer } = tree;
  const things = { grower, server, refresher, settler, forest, tree, sites, builder, room, demand, resizer };
  test.each(Object.keys(SAVED) as (keyof typeof SAVED)[])('of the %s', (kind) => {
    const fields = Object.keys(things[kind]);
    const saved = names(SAVED[kind]);
    const follows = names(FOLLOWS[kind]);
    expect(fields.filter((field) => !saved.includes(field) && !follows.includes(field))).toEqual([]);
    expect(saved.filter((field) => !fields.includes(field))).toEqual([]);
  });
});

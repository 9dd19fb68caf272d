import { randomStream } from '../../src/core/random.ts';
import { Demand, type SiteStream } from '../../src/growth/demand.ts';
import { Grower } from '../../src/growth/grower.ts';
import { specFromValue } from '../../src/spec/parse.ts';
import type { Spec } from '../../src/spec/types.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { createSites } from '../../src/tissue/sites.ts';
import { plainForest } from './plain-forest.ts';

export interface CrowdedOptions {
  /** Junction exponent, or least power. */
  readonly exponent: number | 'least-power';
  /** About this part of the tissue is vessel. */
  readonly crowding: 'hair-thin' | '5 %' | '10 %';
  readonly terminals?: number;
  readonly seed?: string;
  readonly shape?: object;
}

/** Radius of each of the two first vessels, µm; found by trying with 2 × 150 terminals in the box. */
const RADII = { 'hair-thin': 2, '5 %': 540, '10 %': 740 } as const;

/** Two trees of unequal terminals grown into one small box until it is crowded, as growth leaves them. */
export function growCrowded(options: CrowdedOptions): { spec: Spec; grower: Grower; volume: number } {
  const { exponent, crowding, terminals = 150, seed = '1', shape } = options;
  const radius = RADII[crowding];
  const metres = radius * 1e-6;
  // Least power: Q = (π/4) √(m/μ) r³.
  const flow = (Math.PI / 4) * Math.sqrt(625 / 0.0035) * metres * metres * metres;
  const inlet = (x: number, y: number) => ({
    position_mm: [x, y, 5],
    direction: [x > 5 ? -1 : 1, 0, 0],
    flow_m3_s: flow,
  });
  const spec = specFromValue({
    name: 'crowded',
    seed,
    tissue: shape ?? { shape: 'box', min_mm: [0, 0, 0], max_mm: [10, 10, 10] },
    trees: [
      { name: 'one', inlet: inlet(0, 4), terminals: { count: terminals } },
      { name: 'two', inlet: inlet(10, 6), terminals: { count: terminals } },
    ],
    blood: { viscosity: { law: 'constant', value_mPa_s: 3.5 } },
    sizing:
      exponent === 'least-power'
        ? { rule: 'least-power', maintenance_W_m3: 625 }
        : { rule: 'junction-exponent', junction_exponent: exponent, inlet_radius_um: radius },
    clearance: { gap_um: crowding === 'hair-thin' ? 0 : 8 },
    junctions: { min_angle_deg: 20 },
    refine: 'none',
  });
  const tissue = buildTissue(spec.tissue, new Map());
  const demands = spec.trees.map((_, t) => {
    const sites = createSites(tissue, randomStream(seed, `sites ${t}`));
    const shares = randomStream(seed, `shares ${t}`);
    const stream: SiteStream = {
      next: (depth) => sites.next(depth),
      get x() {
        return sites.x;
      },
      get y() {
        return sites.y;
      },
      get z() {
        return sites.z;
      },
      get share() {
        return 0.5 + 1.5 * shares.next();
      },
      save: (out) => sites.save(out),
      restore: (from, places) => sites.restore(from, places),
    };
    return new Demand('count', terminals, stream, null, null, 0.1 * metres);
  });
  const grower = new Grower(spec, tissue, demands, null);
  grower.grow();
  grower.finish();
  const plain = plainForest(grower.builder);
  let volume = 0;
  for (const row of plain.rows) volume += Math.PI * plain.radius[row]! * plain.radius[row]! * plain.length[row]!;
  return { spec, grower, volume: volume / tissue.volume };
}

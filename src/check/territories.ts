import { type Random, randomStream } from '../core/random.ts';
import type { DemandPart } from '../spec/types.ts';
import type { TreeRecord } from '../tree/forest.ts';
import type { Region } from './depth.ts';
import { buildNearestTree } from './nearest.ts';
import type { Tally } from './result.ts';

/** A part of the tissue's demand as the checker sees it. */
export interface DemandRegion {
  readonly region: Region;
  readonly weight: DemandPart['weight'];
}

/** Demand that each of some points serves, sampled. */
interface Sampled {
  /** (n) m³ at demand 1 */
  readonly territory: Float64Array;
  /** m³ at demand 1 that one sample stands for. */
  readonly sample: number;
}

/** Samples a territory has on average, and all together at least and at most. */
const EACH = 64;
const LEAST = 200_000;
const MOST = 16_000_000;
/** Samples of the first pass, which finds how much is demanded. */
const FIRST = 100_000;
/** Cells along the edge of a block that is passed over whole where it lies outside. */
const BLOCK = 4;
/** No territory counts for less than this share of the mean, as README says. */
const FLOOR = 1 / 64;
/**
 * Error allowed a territory of s samples, in samples and over the cube root of s: only samples at its faces, some s^(2/3) of
 * them, may fall to either side. The root mean square over n terminals came to 0.9 to 1.1 for 100 terminals or more and
 * 0.7 to 1.4 for 10, whatever the tissue and the demand (box, ellipsoid, wall; weights 0 to 100); the worst of 10,000 to 4.5.
 */
const WORST_ALLOWED = 8;
const meanAllowed = (n: number) => 1.5 + 3 / Math.sqrt(n);

/**
 * Measures the territories of a tree's terminals again and holds those told, or else the flows, to them.
 *
 * Every part of the demand, and the rest, has a lattice of its own, as fine as it weighs, with a point at random in each
 * cell from a fixed stream; a point of the tissue where that part counts goes to the nearest terminal.
 *
 * @param tissue without its forbidden parts
 * @param parts  in the spec's order: the last that holds a point counts, 1 where none does
 * @param tally  sees the error of each terminal over the error allowed, and the root mean square of all
 * @returns      a note of how it was measured
 */
export function measureTerritories(
  record: TreeRecord,
  terminals: readonly number[],
  tissue: Region,
  parts: readonly DemandRegion[],
  tally: Tally,
): string {
  const { forest, territory: told } = record;
  const n = terminals.length;
  const points = new Float64Array(3 * n);
  terminals.forEach((row, i) => {
    for (let k = 0; k < 3; k++) points[3 * i + k] = forest.position[3 * row + k]!;
  });
  const { territory, sample } = sampleTerritories(points, tissue, parts);
  let whole = 0;
  for (let i = 0; i < n; i++) whole += territory[i]!;
  const mean = whole / n;
  let flow = 0;
  for (const row of terminals) flow += forest.flow[row]!;
  let squares = 0;
  terminals.forEach((row, i) => {
    const wanted = Math.max(territory[i]!, FLOOR * mean);
    const got = told?.[row] ?? (whole * forest.flow[row]!) / flow;
    const samples = Math.max(wanted, got, FLOOR * mean) / sample;
    const off = Math.abs(got - wanted) / sample / Math.cbrt(samples);
    squares += off * off;
    tally.see(off / WORST_ALLOWED, row);
  });
  const typical = Math.sqrt(squares / n);
  const allowed = Number(meanAllowed(n).toPrecision(3));
  if (!(typical <= allowed)) {
    const name = record.names[forest.tree[terminals[0]!]!]!;
    const message = `the terminals of ${name} are off by ${typical.toPrecision(3)} s^(1/3) of s samples, root mean square, allowed ${allowed}`;
    tally.fail(name, -1, typical / allowed, 1, message);
  }
  const each = whole / sample / n;
  return `${Number(each.toPrecision(3))} samples a terminal, off by ${typical.toPrecision(2)} s^(1/3) of s samples (root mean square, allowed ${allowed})`;
}

function sampleTerritories(points: Float64Array, tissue: Region, parts: readonly DemandRegion[]): Sampled {
  const n = points.length / 3;
  // Most that could be demanded: every part's box full.
  let sample = 0;
  forEachStratum(tissue, parts, (_, weight, min, max) => {
    sample += (weight * (max[0]! - min[0]!) * (max[1]! - min[1]!) * (max[2]! - min[2]!)) / FIRST;
  });
  const random = randomStream('fixed', 'check-territories');
  let hits = 0;
  sampleDemand(tissue, parts, sample, random, () => {
    hits++;
  });
  const wanted = Math.min(MOST, Math.max(LEAST, EACH * n));
  sample *= Math.max(hits, 1) / wanted;
  const tree = buildNearestTree(points);
  const territory = new Float64Array(n);
  sampleDemand(tissue, parts, sample, random, (x, y, z) => {
    territory[tree.nearest(x, y, z)]! += sample;
  });
  return { territory, sample };
}

/** Visits what may count as each part, then the rest: its index, weight and box. */
function forEachStratum(
  tissue: Region,
  parts: readonly DemandRegion[],
  visit: (part: number, weight: number, min: readonly number[], max: readonly number[]) => void,
): void {
  for (let part = -1; part < parts.length; part++) {
    const { weight, region } = part < 0 ? { weight: 1, region: tissue } : parts[part]!;
    const min = [0, 1, 2].map((k) => Math.max(tissue.min[k]!, region.min[k]!));
    const max = [0, 1, 2].map((k) => Math.min(tissue.max[k]!, region.max[k]!));
    if (weight > 0 && min.every((low, k) => low < max[k]!)) visit(part, weight, min, max);
  }
}

/** Visits points of the tissue, each of which stands for so much demand (m³). */
function sampleDemand(
  tissue: Region,
  parts: readonly DemandRegion[],
  sample: number,
  random: Random,
  visit: (x: number, y: number, z: number) => void,
): void {
  forEachStratum(tissue, parts, (part, weight, min, max) => {
    const edge = Math.cbrt(sample / weight);
    const own = part < 0 ? tissue : parts[part]!.region;
    const counts = (x: number, y: number, z: number) => {
      if (tissue.depth(x, y, z) < 0) return false;
      for (let k = parts.length - 1; k > part; k--) if (parts[k]!.region.depth(x, y, z) >= 0) return false;
      return part < 0 || own.depth(x, y, z) >= 0;
    };
    const block = BLOCK * edge;
    const reach = 0.5 * Math.sqrt(3) * block * (1 + 1e-9);
    const across = min.map((low, k) => Math.ceil((max[k]! - low) / block));
    for (let c = 0; c < across[2]!; c++) {
      for (let b = 0; b < across[1]!; b++) {
        for (let a = 0; a < across[0]!; a++) {
          const x = min[0]! + a * block;
          const y = min[1]! + b * block;
          const z = min[2]! + c * block;
          const half = 0.5 * block;
          if (tissue.depth(x + half, y + half, z + half) < -reach) continue;
          if (own !== tissue && own.depth(x + half, y + half, z + half) < -reach) continue;
          for (let k = 0; k < BLOCK; k++) {
            for (let j = 0; j < BLOCK; j++) {
              for (let i = 0; i < BLOCK; i++) {
                const px = x + (i + random.next()) * edge;
                const py = y + (j + random.next()) * edge;
                const pz = z + (k + random.next()) * edge;
                if (counts(px, py, pz)) visit(px, py, pz);
              }
            }
          }
        }
      }
    }
  });
}

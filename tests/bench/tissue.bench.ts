/*
 * Times of the questions that growth asks of a tissue.
 *   node tests/bench/run.mjs tissue [-- questions, default 200000]
 * Prints, for each tissue and question, the median processor time of one call over 7 rounds and a checksum of the answers.
 */
import { randomStream } from '../../src/core/random.ts';
import { buildTissue } from '../../src/tissue/build-tissue.ts';
import { checkSurface } from '../../src/tissue/check-surface.ts';
import { createSites } from '../../src/tissue/sites.ts';
import { measureTerritories } from '../../src/tissue/territories.ts';
import type { Tissue } from '../../src/tissue/tissue.ts';
import { tubeInside } from '../../src/tissue/tube.ts';
import { bean } from '../support/surfaces.ts';

const questions = Number(process.argv[2] ?? 200_000);
const ROUNDS = 7;

const surface = bean(6);
const started = performance.now();
checkSurface(surface, 'bean');
console.log(`check of ${surface.triangle.length / 3} triangles: ${(performance.now() - started).toFixed(0)} ms`);

const tissues: readonly (readonly [string, Tissue])[] = [
  ['box', buildTissue({ shape: 'box', min: [0, 0, 0], max: [1, 1, 1] }, new Map())],
  ['ellipsoid', buildTissue({ shape: 'ellipsoid', center: [0, 0, 0], radii: [3, 2, 1] }, new Map())],
  [
    'hollow ellipsoid',
    buildTissue(
      {
        shape: 'difference',
        of: { shape: 'ellipsoid', center: [0, 0, 0], radii: [3, 2, 2] },
        minus: [{ shape: 'ellipsoid', center: [0, 0, 0], radii: [2.5, 1.5, 1.5] }],
      },
      new Map(),
    ),
  ],
  [
    'box with demand',
    buildTissue(
      { shape: 'box', min: [0, 0, 0], max: [1, 1, 1] },
      new Map(),
      [],
      [{ shape: { shape: 'sphere', center: [0.5, 0.5, 0.5], radius: 0.3 }, weight: 5 }],
    ),
  ],
  ['bean surface', buildTissue({ shape: 'surface', file: 'bean', unit: 'm' }, new Map([['bean', surface]]))],
];

function median(values: number[]): number {
  return values.sort((a, b) => a - b)[values.length >> 1]!;
}

function report(tissue: string, question: string, calls: number, ask: () => number): void {
  const times: number[] = [];
  let sum = 0;
  for (let round = 0; round < ROUNDS; round++) {
    const from = process.cpuUsage().user;
    sum = ask();
    times.push(((process.cpuUsage().user - from) * 1e3) / calls);
  }
  console.log(
    `${tissue.padEnd(18)} ${question.padEnd(12)} ${median(times).toFixed(0).padStart(7)} ns   checksum ${sum.toPrecision(12)}`,
  );
}

for (const [name, tissue] of tissues) {
  const random = randomStream('bench', name);
  const points = new Float64Array(3 * questions);
  for (let i = 0; i < points.length; i += 3) {
    for (let axis = 0; axis < 3; axis++) {
      const [lo, hi] = [tissue.min[axis as 0], tissue.max[axis as 0]];
      points[i + axis] = lo + random.next() * (hi - lo);
    }
  }
  const size = Math.cbrt(tissue.volume);
  report(name, 'depth', questions, () => {
    let sum = 0;
    for (let i = 0; i < points.length; i += 3) sum += tissue.depth(points[i]!, points[i + 1]!, points[i + 2]!);
    return sum;
  });
  report(name, 'deeperThan', questions, () => {
    let sum = 0;
    for (let i = 0; i < points.length; i += 3)
      if (tissue.deeperThan(points[i]!, points[i + 1]!, points[i + 2]!, 0.005 * size)) sum++;
    return sum;
  });
  // Tubes a twentieth of the tissue long, as most vessels are shorter.
  report(name, 'tubeInside', questions, () => {
    let sum = 0;
    for (let i = 0; i < points.length; i += 3) {
      const [x, y, z] = [points[i]!, points[i + 1]!, points[i + 2]!];
      const k = i % 2 === 0 ? 0.03 * size : -0.03 * size;
      if (tubeInside(tissue, x, y, z, x + k, y - k, z + k, 0.005 * size)) sum++;
    }
    return sum;
  });
  const wanted = Math.floor(questions / 10);
  report(name, 'site', wanted, () => {
    const stream = createSites(tissue, randomStream('bench', 'sites'));
    let sum = 0;
    for (let i = 0; i < wanted; i++) if (stream.next(0)) sum += stream.x + stream.y + stream.z;
    return sum;
  });
  const stream = createSites(tissue, randomStream('bench', 'sites'));
  for (let i = 0; i < wanted; i++) stream.next(0);
  const sites = stream.positions();
  report(name, 'territory', wanted, () => measureTerritories(tissue, sites).reduce((sum, one) => sum + one * one, 0));
}

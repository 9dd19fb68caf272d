import type { Tally } from '../result.ts';
import { partsRound } from './inside.ts';
import type { MeshNotes } from './notes.ts';
import type { Components } from './topology.ts';
import type { Welded } from './weld.ts';

/**
 * Looks whether the counts of `mesh.json` are those of the surface and the tables.
 *
 * @param counted by key; null where it cannot be counted
 */
export function lookAtCounts(
  told: Readonly<Record<string, unknown>>,
  counted: Readonly<Record<string, number | null>>,
  tally: Tally,
): void {
  for (const [key, count] of Object.entries(counted)) {
    if (count === null) continue;
    tally.checked++;
    if (told[key] === count) continue;
    const off = typeof told[key] === 'number' ? Math.abs(told[key] - count) : 1;
    tally.fail('mesh.json', -1, off, 0, `counts.${key}: got ${JSON.stringify(told[key])}, counted ${count}`);
  }
}

/** Looks whether each of the points of `mesh.json` lies inside one part of the lumen, each inside another. */
export function lookAtInsidePoints(notes: MeshNotes, mesh: Welded, components: Components, tally: Tally): void {
  const fail = (message: string) => tally.fail('mesh.json', -1, 1, 0, message);
  const taken = new Map<number, number>();
  const points = notes.insidePoints === undefined ? [notes.insidePoint] : notes.insidePoints;
  if (!Array.isArray(points)) {
    fail('inside_points_m: expected a list of points');
    return;
  }
  if (notes.insidePoints !== undefined && points.length !== components.count)
    fail(`inside_points_m: got ${points.length} points, the lumen has ${components.count} parts`);
  points.forEach((point, k) => {
    const key = notes.insidePoints === undefined ? 'inside_point_m' : `inside_points_m[${k}]`;
    tally.checked++;
    if (!isPoint(point)) {
      fail(`${key}: got ${JSON.stringify(point)}, expected three numbers`);
      return;
    }
    const parts = partsRound(mesh, components.ofTriangle, components.count, point);
    if (parts.length !== 1) fail(`${key}: (${point.join(', ')}) m lies inside ${parts.length} parts, expected one`);
    else if (taken.has(parts[0]!)) fail(`${key}: lies in the same part as inside_points_m[${taken.get(parts[0]!)}]`);
    else taken.set(parts[0]!, k);
  });
  if (notes.insidePoint === undefined || notes.insidePoints === undefined) return;
  tally.checked++;
  if (JSON.stringify(notes.insidePoint) !== JSON.stringify(points[0]))
    fail(`inside_point_m: got ${JSON.stringify(notes.insidePoint)}, expected the first of inside_points_m`);
}

function isPoint(value: unknown): value is [number, number, number] {
  return Array.isArray(value) && value.length === 3 && value.every((x) => typeof x === 'number' && Number.isFinite(x));
}

import type { Fault } from '../core/errors.ts';
import { fromSi, toSi } from '../core/units.ts';
import { isObject, peekKey, peekNumber, peekTriple, type Raw, readTriple } from './fields.ts';
import { quote, shortNumber } from './got.ts';

/** Pa; pressures where a spec gives none. Source: common practice, no source (large artery, arteriole, large vein). */
export const SUPPLY_PRESSURE = toSi(100, 'mmHg');
export const DRAIN_PRESSURE = toSi(5, 'mmHg');
export const TERMINAL_PRESSURE = toSi(30, 'mmHg');

/** Name of a tree that gives none. */
export function defaultTreeName(row: number, kind: unknown): string {
  if (row > 0) return `tree_${row}`;
  return kind === 'drain' ? 'drain' : 'supply';
}

/** Rules between objects of one spec. Reads the value as it came, so that they are judged beside every other fault. */
export function judgeTogether(spec: unknown): Fault[] {
  if (!isObject(spec) || !Array.isArray(spec.trees)) return [];
  const rule = isObject(spec.sizing) ? spec.sizing.rule : undefined;
  const leastPower = rule === undefined || rule === 'least-power';
  const trees: readonly unknown[] = spec.trees;
  return [
    ...judgeNames(trees),
    ...trees.flatMap((tree, row) => [...judgePressures(tree, row, leastPower), ...judgePoints(tree, row)]),
  ];
}

function judgeNames(trees: readonly unknown[]): Fault[] {
  const faults: Fault[] = [];
  const firstAt = new Map<string, number>();
  trees.forEach((tree, row) => {
    if (!isObject(tree)) return;
    const name = tree.name ?? defaultTreeName(row, tree.kind);
    if (typeof name !== 'string') return;
    const twin = firstAt.get(name);
    if (twin === undefined) firstAt.set(name, row);
    else {
      const message = `got ${quote(name)}, the name of trees[${twin}] too, expected a name of its own`;
      faults.push({ code: 'duplicate', where: `trees[${row}].name`, message });
    }
  });
  return faults;
}

function judgePressures(tree: unknown, row: number, leastPower: boolean): Fault[] {
  if (!isObject(tree) || !isObject(tree.inlet) || !isObject(tree.terminals)) return [];
  const drain = tree.kind === 'drain';
  // A pressure that is there and cannot be read is reported as such; no default stands in for it.
  if (isGarbled(tree.inlet) || isGarbled(tree.terminals)) return [];
  const asked = peekKey(tree.terminals, 'pressure', 'pressure');
  if (leastPower && !asked) return [];
  const terminal = asked ? peekNumber(tree.terminals, 'pressure', 'pressure') : TERMINAL_PRESSURE;
  const given = peekKey(tree.inlet, 'pressure', 'pressure');
  const otherwise = drain ? DRAIN_PRESSURE : SUPPLY_PRESSURE;
  const root = given ? peekNumber(tree.inlet, 'pressure', 'pressure') : otherwise;
  if (terminal === undefined || root === undefined || (drain ? root < terminal : root > terminal)) return [];
  const unit = given?.unit ?? 'mmHg';
  const inUnit = (pressure: number) => `${shortNumber(fromSi(pressure, unit))} ${unit}`;
  const got = `got ${inUnit(root)}${given ? '' : ' (the default)'}`;
  const limit = `the terminals’ ${inUnit(terminal)}${asked ? '' : ' (the default)'}`;
  return [
    {
      code: 'out-of-range',
      where: `trees[${row}].inlet.${given?.key ?? 'pressure'}`,
      message: `${got}, expected ${drain ? 'below' : 'above'} ${limit}`,
    },
  ];
}

function isGarbled(holder: Raw): boolean {
  const mentioned = Object.keys(holder).some((key) => key.startsWith('pressure') && holder[key] !== undefined);
  return mentioned && peekNumber(holder, 'pressure', 'pressure') === undefined;
}

function judgePoints(tree: unknown, row: number): Fault[] {
  if (!isObject(tree)) return [];
  const root = peekTriple(tree.inlet, 'position', 'length');
  const points = peekKey(tree.terminals, 'points', 'length');
  if (!root || !points || !Array.isArray(points.value)) return [];
  const faults: Fault[] = [];
  points.value.forEach((value: unknown, at) => {
    const point = readTriple(value, points.unit);
    if (point?.join() !== root.join()) return;
    const where = `trees[${row}].terminals.${points.key}[${at}]`;
    faults.push({ code: 'duplicate', where, message: 'got the inlet’s own position, expected a point away from it' });
  });
  return faults;
}

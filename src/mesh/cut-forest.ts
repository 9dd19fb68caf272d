import { inputError } from '../core/errors.ts';
import { squaredDistanceBetweenSegments } from '../core/segments.ts';
import { type Children, listChildren } from '../tree/children.ts';
import type { FlowField, Forest } from '../tree/forest.ts';
import { freezeForest } from '../tree/freeze.ts';
import { strahlerOrders } from '../tree/strahler.ts';
import { tubeLength, vesselOfRow } from '../tree/vessels.ts';
import { FIT_MARGIN, RUN_OUT, reach } from './reach.ts';

export interface CutOptions {
  /** m; vessels at least this wide are kept. */
  readonly keepAbove?: number | undefined;
  /** Vessels of at least this Strahler order are kept; terminals have order 1. */
  readonly keepOrder?: number | undefined;
}

/** A forest of which the finest vessels were cut off. */
export interface CutForest {
  readonly forest: Forest;
  /** (n of `forest`) row of the whole forest. */
  readonly source: Int32Array;
  /** (n of `forest`) vessel number in the whole forest; −1 for roots. */
  readonly vesselNumbers: Int32Array;
  /** Rows of `forest` whose daughters were cut off. */
  readonly cuts: readonly number[];
  /** (n of `forest`) length over the length in the whole forest: more than 1 where a cut vessel was drawn out. */
  readonly drawn: Float64Array;
  /** Vessels cut off. */
  readonly removed: number;
}

/**
 * Cuts the finest vessels off a forest, whole vessels at a time, so that flow is conserved: where one daughter of a node
 * stays, all of them stay, and those that are too fine end at their far node.
 *
 * A vessel whose daughters were cut off ends in a cap. Where it is too short for a straight run of two radii before it,
 * it is drawn out along its axis, unless another vessel is in the way.
 *
 * @throws InputError where no vessel would be left, or an option is out of range
 * Cost:   O(n + cuts · vessels left)
 */
export function cutForest(forest: Forest, options: CutOptions): CutForest {
  const { keepAbove = 0, keepOrder = 1 } = options;
  if (!(keepAbove >= 0 && keepAbove < Infinity))
    throw inputError('out-of-range', 'keepAbove', `got ${keepAbove} m, expected 0 or more`);
  if (!(Number.isInteger(keepOrder) && keepOrder >= 1))
    throw inputError('out-of-range', 'keepOrder', `got ${keepOrder}, expected a whole number from 1 up`);
  const order = strahlerOrders(forest);
  const children = listChildren(forest);
  const passes = (row: number): boolean => forest.radius[row]! >= keepAbove && order[row]! >= keepOrder;
  const n = forest.count;
  const kept = new Uint8Array(n);
  const cut = new Uint8Array(n);
  let left = 0;
  for (let row = 0; row < n; row++) {
    const root = forest.parent[row]! < 0;
    if (root) kept[row] = 1;
    if (kept[row] === 0) continue;
    let any = false;
    if (root || passes(row)) for (const child of daughters(children, row)) any ||= passes(child);
    if (root && !any) {
      const child = children.list[children.start[row]!]!;
      throw inputError(
        'nothing-left',
        keepAbove > forest.radius[child]! ? 'keepAbove' : 'keepOrder',
        `tree ${forest.tree[row]} begins with a vessel of radius ${forest.radius[child]} m and order ${order[child]}, ` +
          `expected at least ${keepAbove} m and order ${keepOrder}`,
      );
    }
    if (any) for (const child of daughters(children, row)) kept[child] = 1;
    else if (children.start[row] !== children.start[row + 1]) cut[row] = 1;
    if (!root) left++;
  }
  const rows: number[] = [];
  for (let row = 0; row < n; row++) if (kept[row] === 1) rows.push(row);
  const place = new Int32Array(n).fill(-1);
  for (let i = 0; i < rows.length; i++) place[rows[i]!] = i;
  const roots: number[] = [];
  for (let i = 0; i < rows.length; i++) if (forest.parent[rows[i]!]! < 0) roots.push(i);
  const position = new Float64Array(3 * rows.length);
  for (let i = 0; i < rows.length; i++)
    for (let k = 0; k < 3; k++) position[3 * i + k] = forest.position[3 * rows[i]! + k]!;
  const drawn = new Float64Array(rows.length).fill(1);
  for (const row of rows) if (cut[row] === 1) drawOut(forest, children, row, rows, place, position, drawn);
  const frozen = freezeForest({
    count: rows.length,
    parent: rows.map((row) => (forest.parent[row]! < 0 ? -1 : place[forest.parent[row]!]!)),
    position,
    radius: rows.map((row) => forest.radius[row]!),
    flow: rows.map((row) => forest.flow[row]!),
    roots,
  });
  const source = Int32Array.from(frozen.source, (i) => rows[i]!);
  const cuts: number[] = [];
  source.forEach((row, i) => {
    if (cut[row] === 1) cuts.push(i);
  });
  return {
    forest: frozen.forest,
    source,
    vesselNumbers: Int32Array.from(source, (row) => (forest.parent[row]! < 0 ? -1 : vesselOfRow(forest, row))),
    cuts,
    drawn: Float64Array.from(frozen.source, (i) => drawn[i]!),
    removed: n - (forest.treeStart.length - 1) - left,
  };
}

/** Lengthens a vessel that now ends in a cap, where it is too short and there is room. */
function drawOut(
  forest: Forest,
  children: Children,
  row: number,
  rows: readonly number[],
  place: Int32Array,
  position: Float64Array,
  drawn: Float64Array,
): void {
  const parent = forest.parent[row]!;
  const r = forest.radius[row]!;
  const length = tubeLength(forest, row);
  const wanted = FIT_MARGIN * (ballRadius(forest, children, parent) + RUN_OUT * r);
  if (length >= wanted) return;
  const from = [0, 1, 2].map((k) => forest.position[3 * parent + k]!) as [number, number, number];
  const end = [0, 1, 2].map((k) => from[k]! + ((forest.position[3 * row + k]! - from[k]!) * wanted) / length) as [
    number,
    number,
    number,
  ];
  const tip = [0, 1, 2].map((k) => forest.position[3 * row + k]!) as [number, number, number];
  for (const other of rows) {
    const above = forest.parent[other]!;
    if (other === row || above < 0 || above === parent || other === parent) continue;
    // What another cut vessel was drawn out by counts too.
    const [a, b] = [3 * place[above]!, 3 * place[other]!];
    const square = squaredDistanceBetweenSegments(
      ...tip,
      ...end,
      position[a]!,
      position[a + 1]!,
      position[a + 2]!,
      position[b]!,
      position[b + 1]!,
      position[b + 2]!,
    );
    const apart = 1.05 * (r + forest.radius[other]!);
    if (square < apart * apart) return;
  }
  for (let k = 0; k < 3; k++) position[3 * place[row]! + k] = end[k]!;
  drawn[place[row]!] = wanted / length;
}

/** Least radius of a ball round a node outside which its vessels are apart; run-out at a root. */
function ballRadius(forest: Forest, children: Children, row: number): number {
  const ends = daughters(children, row);
  if (forest.parent[row]! < 0) return RUN_OUT * forest.radius[row]!;
  const rows = [row, ...ends];
  let ball = Math.max(...rows.map((i) => forest.radius[i]!));
  const axis = (i: number): number[] => {
    const other = i === row ? forest.parent[row]! : i;
    const d = [0, 1, 2].map((k) => forest.position[3 * other + k]! - forest.position[3 * row + k]!);
    const size = Math.sqrt(d[0]! * d[0]! + d[1]! * d[1]! + d[2]! * d[2]!);
    return d.map((x) => x / size);
  };
  for (let i = 0; i < rows.length; i++) {
    for (let j = 0; j < i; j++) {
      const u = axis(rows[i]!);
      const v = axis(rows[j]!);
      const angle = Math.acos(Math.max(-1, Math.min(1, u[0]! * v[0]! + u[1]! * v[1]! + u[2]! * v[2]!)));
      ball = Math.max(ball, reach(forest.radius[rows[i]!]!, forest.radius[rows[j]!]!, angle));
    }
  }
  return ball;
}

function daughters(children: Children, row: number): readonly number[] {
  return [...children.list.slice(children.start[row]!, children.start[row + 1]!)];
}

/**
 * Carries a solution over to what is left of its forest: values stay, and along a vessel that was drawn out pressure
 * and transit go on as they went.
 *
 * @param whole a field solved on the whole forest
 */
export function cutField(cut: CutForest, whole: FlowField): FlowField {
  const { forest, source, drawn } = cut;
  const take = (column: ArrayLike<number>): Float64Array => Float64Array.from(source, (row) => column[row]!);
  const goOn = (column: ArrayLike<number>): Float64Array => {
    const out = take(column);
    for (let i = 0; i < forest.count; i++) {
      const parent = forest.parent[i]!;
      if (parent >= 0 && drawn[i] !== 1) out[i] = out[parent]! + (out[i]! - out[parent]!) * drawn[i]!;
    }
    return out;
  };
  return {
    forest,
    pressure: goOn(whole.pressure),
    transit: goOn(whole.transit),
    viscosity: take(whole.viscosity),
    velocity: take(whole.velocity),
    wallShear: take(whole.wallShear),
    reynolds: take(whole.reynolds),
    haematocrit: take(whole.haematocrit),
  };
}

/**
 * Resistance of everything that was cut off below each row of what is left: the pressure at the cap less the
 * flow-weighted mean pressure of the terminals below, over the flow. 0 where nothing was cut off.
 *
 * @param whole the field on the whole forest
 * @param left  the same on what is left, from `cutField` or solved anew
 * @returns     (n of the forest that is left) Pa·s/m³; exact where all terminals below share one pressure
 */
export function cutResistances(cut: CutForest, whole: FlowField, left: FlowField): Float64Array {
  const { forest } = whole;
  const n = forest.count;
  const weighted = new Float64Array(n);
  const flow = new Float64Array(n);
  const leaf = new Uint8Array(n).fill(1);
  for (let i = n - 1; i >= 0; i--) {
    if (leaf[i] === 1) {
      flow[i] = forest.flow[i]!;
      weighted[i] = forest.flow[i]! * whole.pressure[i]!;
    }
    const parent = forest.parent[i]!;
    if (parent < 0) continue;
    leaf[parent] = 0;
    flow[parent]! += flow[i]!;
    weighted[parent]! += weighted[i]!;
  }
  const out = new Float64Array(cut.forest.count);
  for (const i of cut.cuts) {
    const row = cut.source[i]!;
    out[i] = Math.abs(left.pressure[i]! - weighted[row]! / flow[row]!) / flow[row]!;
  }
  return out;
}

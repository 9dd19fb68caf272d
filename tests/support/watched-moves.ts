import type { Room } from '../../src/room/room.ts';
import { junctionExponent } from '../../src/sizing/size-tree.ts';
import type { Spec } from '../../src/spec/types.ts';
import { judgeForest } from './forest-judge.ts';
import { columnsOf, plainForest, plainForestCost, sameColumns } from './plain-forest.ts';

/**
 * Power per length (W/m) of a load, written out: least-power radii from the flow, others from the inlet's radius by the
 * junction law; 8μQ²/(πr⁴) + mπr².
 */
export function plainPowerPerLength(room: Room, spec: Spec): (load: number, tree: number) => number {
  const { builder } = room;
  const { load: loads } = plainForest(builder);
  const viscosity = spec.blood.viscosity.value;
  const { maintenance } = spec.blood;
  return (load, tree) => {
    const part = load / loads[builder.roots[tree]!]!;
    const flow = spec.trees[tree]!.inlet.flow * part;
    const radius =
      spec.sizing.rule === 'least-power'
        ? Math.cbrt((4 * flow * Math.sqrt(viscosity / maintenance)) / Math.PI)
        : builder.inletRadius[tree]! * Math.exp(Math.log(part) / junctionExponent(spec));
    return (8 * viscosity * flow * flow) / (Math.PI * radius ** 4) + maintenance * Math.PI * radius * radius;
  };
}

/** What a run of moves came to. */
export interface Watched {
  accepted: number;
  refused: number;
  /** Sentences; none where every move kept what moves promise. */
  readonly faults: string[];
  /** W; cost of the whole forest by the plain twin. */
  cost: number;
}

/**
 * Makes moves one by one and holds each to what moves promise: an accepted one changes the plain cost of the whole forest
 * by exactly what it says and leaves a forest that the plain judge finds feasible; a refused one changes nothing.
 *
 * @param move makes move k and gives what it saved (W), 0 where it was refused, 'saved' where it does not say how much
 */
export function watchMoves(room: Room, spec: Spec, count: number, move: (k: number) => number | 'saved'): Watched {
  const { builder } = room;
  const perLength = plainPowerPerLength(room, spec);
  const watched: Watched = { accepted: 0, refused: 0, faults: [], cost: plainForestCost(builder, perLength) };
  let columns = columnsOf(builder);
  for (let k = 0; k < count && watched.faults.length === 0; k++) {
    const gain = move(k);
    const after = columnsOf(builder);
    if (gain === 0) {
      watched.refused++;
      if (!sameColumns(after, columns)) watched.faults.push(`move ${k}: refused, but the forest has changed`);
      continue;
    }
    watched.accepted++;
    columns = after;
    const cost = plainForestCost(builder, perLength);
    const saved = watched.cost - cost;
    // The difference of two sums of some hundred terms is known to some 10⁻¹⁴ of either.
    const close =
      gain === 'saved' ? saved > -1e-13 * cost : Math.abs(saved - gain) <= 1e-9 * Math.abs(gain) + 1e-13 * cost;
    if (!close) watched.faults.push(`move ${k}: said ${gain} W saved, plainly ${saved} of ${cost}`);
    watched.cost = cost;
    watched.faults.push(...judgeForest(room).map((fault) => `after move ${k}: ${fault}`));
  }
  return watched;
}

/** What does not fit when every tube is as wide as it is certified for. */
export function judgeReserves(room: Room): string[] {
  const { builder } = room;
  room.begin();
  const { rows, radius } = plainForest(builder);
  const faults = rows
    .filter((row) => room.reserveOf(row) < radius[row]! * (1 - 1e-12))
    .map((row) => `row ${row}: certified for ${room.reserveOf(row)}, is ${radius[row]}`);
  const reserves = Float64Array.from({ length: builder.count }, (_, row) => room.reserveOf(row));
  return [...faults, ...judgeForest(room, { radius: reserves })];
}

import { inputError } from './core/errors.ts';
import { solveWithEnds } from './flow/ends.ts';
import { narrowTube, withFlow } from './flow/narrow.ts';
import type { NamedBytes } from './formats/format.ts';
import type { MeshUnit } from './formats/mesh/length-unit.ts';
import { encodeMeshFolder } from './formats/mesh/mesh-folder.ts';
import { buildLumen } from './mesh/build-lumen.ts';
import { type CutOptions, cutField, cutForest, cutResistances } from './mesh/cut-forest.ts';
import type { LumenMesh } from './mesh/lumen.ts';
import { solveRecord, VERSION } from './run.ts';
import type { Spec } from './spec/types.ts';
import type { FlowField, TreeRecord } from './tree/forest.ts';
import { countVessels } from './tree/vessels.ts';

/*
 * What is run on a tree that stands, grown here or read from a file: its flow solved again, its lumen meshed.
 */

/** What is done to a tree before its flow is solved again. */
export interface FlowChange {
  /** Pa·s, > 0; the spec's where left out. */
  readonly viscosity?: number | undefined;
  /** Tubes by row, and what is taken off their radius: above 0 and below 1. */
  readonly narrow?: readonly { readonly row: number; readonly fraction: number }[] | undefined;
}

/** A tree solved again. */
export interface FlowResult {
  /** The spec, with the viscosity used. */
  readonly spec: Spec;
  /** Null where flow would run backwards: a tree file holds no such flow. */
  readonly record: TreeRecord | null;
  /** Rows through which it would. */
  readonly reversed: readonly number[];
}

/**
 * Solves a grown tree again under another viscosity, or with vessels narrowed. With the viscosity alone, flows stay and
 * pressures follow. Where a vessel is narrowed, roots and terminals keep their pressures and flows follow.
 *
 * Cost: O(n)
 */
export function solveAgain(record: TreeRecord, spec: Spec, change: FlowChange): FlowResult {
  const viscosity = change.viscosity ?? spec.blood.viscosity.value;
  const used: Spec = { ...spec, blood: { ...spec.blood, viscosity: { law: 'constant', value: viscosity } } };
  const solved = solveRecord(record.forest, used);
  const narrow = change.narrow ?? [];
  if (narrow.length === 0) return { spec: used, record: solved, reversed: [] };
  let forest = record.forest;
  for (const { row, fraction } of narrow) forest = narrowTube(forest, row, 1 - fraction);
  const roots = spec.trees.map((tree) => tree.inlet.pressure);
  const { flow } = solveWithEnds(forest, roots, solved.field!.pressure, viscosity);
  const reversed: number[] = [];
  for (let i = 0; i < forest.count; i++) {
    if (!(flow[i]! * flow[forest.treeStart[forest.tree[i]!]!]! > 0)) reversed.push(i);
  }
  if (reversed.length > 0) return { spec: used, record: null, reversed };
  return { spec: used, record: solveRecord(withFlow(forest, flow), used), reversed };
}

export interface MeshOptions extends CutOptions {
  /** Segments round a vessel. */
  readonly around?: number | undefined;
  /** Unit of the surface files; metres where left out. */
  readonly unit?: MeshUnit | undefined;
}

export interface MeshResult {
  readonly mesh: LumenMesh;
  /** The files of a mesh folder. */
  readonly files: readonly NamedBytes[];
  /** Vessels that were meshed, and that were cut off. */
  readonly vessels: number;
  readonly removed: number;
}

/**
 * Meshes the lumen of a tree, or of its wider part.
 *
 * @param spec tells blood, and pressures where the record holds no solution; null where there is none
 * @throws InputError for options out of range, or a record with neither solution nor spec
 */
export function meshTree(record: TreeRecord, spec: Spec | null, options: MeshOptions = {}): MeshResult {
  const solved = record.field !== null || spec === null ? record : solveRecord(record.forest, spec);
  const { kinds, field: whole } = solved;
  if (whole === null) {
    throw inputError('no-flow', 'tree', 'got neither a flow solution nor a spec, expected one of them for the tables');
  }
  const { around, unit, keepAbove, keepOrder } = options;
  const cut =
    keepAbove === undefined && keepOrder === undefined ? null : cutForest(record.forest, { keepAbove, keepOrder });
  const forest = cut?.forest ?? record.forest;
  const field = cut === null ? whole : cutField(cut, whole);
  const mesh = buildLumen(forest, { around, kinds, vesselNumbers: cut?.vesselNumbers });
  const files = encodeMeshFolder({
    mesh,
    forest,
    field,
    kinds,
    unit,
    density: spec?.blood.density ?? densityOf(whole),
    viscosity: spec?.blood.viscosity.value ?? onlyValue(whole.viscosity),
    cut:
      cut === null
        ? undefined
        : {
            notes: { keepAbove: keepAbove ?? null, keepOrder: keepOrder ?? null, removed: cut.removed },
            source: cut.source,
            vesselNumbers: cut.vesselNumbers,
            resistances: cutResistances(cut, whole, field),
          },
    facts: {
      program: `vesselwright ${VERSION}`,
      name: spec?.name,
      seed: spec?.seed,
      sizing: spec?.sizing.rule,
      junction_exponent: spec === null || spec.sizing.rule === 'least-power' ? undefined : spec.sizing.exponent,
    },
  });
  return { mesh, files, vessels: countVessels(forest), removed: cut?.removed ?? 0 };
}

/** kg/m³, from the Reynolds number of the first vessel: Re = 2 ρ v r / μ. */
function densityOf(field: FlowField): number {
  return (field.reynolds[0]! * field.viscosity[0]!) / (2 * field.velocity[0]! * field.forest.radius[0]!);
}

/** The one value of a column, or null where there are several. */
function onlyValue(column: ArrayLike<number>): number | null {
  for (let i = 1; i < column.length; i++) if (column[i] !== column[0]) return null;
  return column[0]!;
}

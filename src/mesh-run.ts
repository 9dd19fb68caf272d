import { inputError } from './core/errors.ts';
import type { TriangleSurface } from './core/surface.ts';
import { fromSi } from './core/units.ts';
import { effectiveLengths } from './flow/effective-lengths.ts';
import { type LengthChoice, shortenField } from './flow/shortened-field.ts';
import type { NamedBytes } from './formats/format.ts';
import type { MeshUnit } from './formats/mesh/length-unit.ts';
import { encodeMeshFolder } from './formats/mesh/mesh-folder.ts';
import { addNegativeFiles, type NegativeNotes } from './formats/mesh/negative-files.ts';
import { type LateHead, streamBinaryStl } from './formats/mesh/stl-stream.ts';
import { addVolumeFiles, type VolumeNotes } from './formats/mesh/volume-files.ts';
import { buildLumen } from './mesh/build-lumen.ts';
import { type CutForest, type CutOptions, cutField, cutForest, cutResistances } from './mesh/cut-forest.ts';
import { extendCaps, extendField, type ShortExtension } from './mesh/extend-caps.ts';
import type { InletProfile } from './mesh/inlet-profile.ts';
import type { LumenMesh, LumenProblem } from './mesh/lumen.ts';
import { LumenPlan } from './mesh/lumen-plan.ts';
import { RunningFigures } from './mesh/running-figures.ts';
import { lumenPieces } from './mesh/stream-lumen.ts';
import { leastWall as measureWall } from './print/least-wall.ts';
import { makeNegative } from './print/negative.ts';
import { specAsSolved } from './rerun.ts';
import { solveRecord, VERSION } from './run.ts';
import { solvedAgainOf } from './spec/solved-again.ts';
import type { Spec } from './spec/types.ts';
import { buildTissue } from './tissue/build-tissue.ts';
import type { FlowField, Forest, TreeRecord } from './tree/forest.ts';
import { strahlerOrders } from './tree/strahler.ts';
import { countVessels, vesselOfRow } from './tree/vessels.ts';
import { buildVolume } from './volume/build-volume.ts';
import { solveVolumeFlow } from './volume/volume-flow.ts';

/* How the lumen of a tree that stands, grown here or read from a file, becomes a mesh folder. */

export interface MeshOptions extends CutOptions {
  /** Segments round a vessel. */
  readonly around?: number | undefined;
  /** Axial edges over circumferential edges in plain tubes. */
  readonly axialStretch?: number | undefined;
  /** Unit of the surface files; metres where left out. */
  readonly unit?: MeshUnit | undefined;
  /** Lengths that resist flow in the network whose pressures the tables give; those of the axes where left out. */
  readonly lengths?: LengthChoice | undefined;
  /** Diameters by which vessels are drawn out at all caps; 0 where left out. */
  readonly extend?: number | undefined;
  /** Velocities at the inlets that are written as a table. */
  readonly profile?: InletProfile | undefined;
  /** Input written for meshers and flow solvers. */
  readonly solverFiles?: readonly SolverFiles[] | undefined;
  /** Whether the surface is filled with a volume mesh too; its layers along the wall, and how they grow. */
  readonly volume?: boolean | undefined;
  readonly layers?: number | undefined;
  readonly layerGrowth?: number | undefined;
}

export const SOLVER_FILES = ['gmsh', 'openfoam'] as const;
export type SolverFiles = (typeof SOLVER_FILES)[number];

export interface MeshResult {
  readonly mesh: LumenMesh;
  /** The files of a mesh folder. */
  readonly files: readonly NamedBytes[];
  /** Null where no volume mesh was asked for. */
  readonly volume: VolumeNotes | null;
  /** Vessels that were meshed, and that were cut off. */
  readonly vessels: number;
  readonly removed: number;
}

/**
 * Meshes the lumen of a tree, or of its wider part.
 *
 * @param grown spec as grown, which tells blood, and pressures where the record holds no solution; null where there is none
 * @throws InputError for options out of range, or a record with neither solution nor spec
 */
export function meshTree(record: TreeRecord, grown: Spec | null, options: MeshOptions = {}): MeshResult {
  const spec = grown === null ? null : specAsSolved(grown, solvedAgainOf(record.provenance));
  const solved = record.field !== null || spec === null ? record : solveRecord(record.forest, spec);
  const { kinds, field: whole } = solved;
  if (whole === null) {
    throw inputError('no-flow', 'tree', 'got neither a flow solution nor a spec, expected one of them for the tables');
  }
  const {
    lengths = 'axis',
    around,
    unit,
    axialStretch,
    keepAbove,
    keepOrder,
    extend = 0,
    profile,
    solverFiles = [],
  } = options;
  const viscosity = spec?.blood.viscosity.value ?? onlyValue(whole.viscosity);
  if (solverFiles.includes('openfoam') && viscosity === null) {
    throw inputError('no-viscosity', 'solverFiles', 'got blood of several viscosities, expected one for a flow solver');
  }
  const part = partOf(record, whole, options);
  const { cut } = part;
  const extended = extendCaps(part.forest, extend);
  const forest = extend === 0 ? part.forest : extended.forest;
  const axis = extend === 0 ? part.field : extendField(extended, part.forest, part.field);
  const shorter = effectiveLengths(forest);
  const effective = shortenField(axis, kinds, shorter);
  const field = lengths === 'axis' ? axis : effective;
  // Resistances behind a cut are those of the network whose pressures stand beside them.
  const ofPart = (of: FlowField) => (lengths === 'axis' ? of : shortenField(of, kinds, effectiveLengths(of.forest)));
  const numberOf = (row: number): number => cut?.vesselNumbers[row] ?? vesselOfRow(forest, row);
  const built = buildLumen(forest, { around, axialStretch, kinds, vesselNumbers: cut?.vesselNumbers });
  const { layers, layerGrowth } = options;
  const volume =
    options.volume === true
      ? buildVolume(built, forest, { layers, layerGrowth, axialStretch, vesselNumbers: cut?.vesselNumbers })
      : null;
  const mesh = {
    ...built,
    problems: [
      ...built.problems,
      ...shortExtensions(built, extended.short, numberOf),
      ...(volume === null ? [] : volume.problems),
    ],
  };
  const density = spec?.blood.density ?? densityOf(whole);
  const made = encodeMeshFolder({
    mesh,
    forest,
    field,
    kinds,
    unit,
    axialStretch,
    density,
    viscosity,
    networks: { used: lengths, effectiveLengths: shorter, axis: axis.pressure, effective: effective.pressure },
    extension: extend === 0 ? undefined : { diameters: extend, got: extended.extension },
    cut:
      cut === null
        ? undefined
        : {
            notes: { keepAbove: keepAbove ?? null, keepOrder: keepOrder ?? null, removed: cut.removed },
            source: cut.source,
            vesselNumbers: cut.vesselNumbers,
            resistances: cutResistances(cut, ofPart(whole), ofPart(part.field)),
          },
    facts: {
      program: `vesselwright ${VERSION}`,
      name: spec?.name,
      seed: spec?.seed,
      sizing: spec?.sizing.rule,
      junction_exponent: spec === null || spec.sizing.rule === 'least-power' ? undefined : spec.sizing.exponent,
    },
    profile,
    solverFiles,
  });
  const filled =
    volume === null
      ? { files: made, notes: null }
      : addVolumeFiles(made, volume, solveVolumeFlow(volume, forest, field, kinds), unit ?? 'm');
  return {
    mesh,
    files: filled.files,
    volume: filled.notes,
    vessels: countVessels(forest),
    removed: cut?.removed ?? 0,
  };
}

/** A lumen surface that is made while it is written. */
export interface SurfaceStream {
  /** About how many triangles there will be. */
  readonly foreseen: number;
  /** A binary STL. */
  readonly stl: LateHead;
  /** What was seen of what has been written so far. */
  readonly figures: RunningFigures;
  readonly problems: () => readonly LumenProblem[];
}

/**
 * The lumen surface of a whole tree as a binary STL that is made while it is written: for trees whose surface is too large to
 * be held. It is that of `meshTree`, but is not held to the promises of a mesh folder.
 *
 * @throws InputError for options out of range
 */
export function streamSurface(
  record: TreeRecord,
  options: Pick<MeshOptions, 'around' | 'axialStretch' | 'unit'> = {},
): SurfaceStream {
  const { around, axialStretch, unit = 'm' } = options;
  const plan = new LumenPlan(record.forest, { around, axialStretch, kinds: record.kinds });
  const figures = new RunningFigures();
  return {
    foreseen: plan.triangles,
    stl: streamBinaryStl(lumenPieces(plan), plan.patches, unit, (piece) => figures.see(piece)),
    figures,
    problems: () => plan.problems,
  };
}

/** What of a tree is meshed, and its solution. */
function partOf(
  record: TreeRecord,
  whole: FlowField,
  { keepAbove, keepOrder }: CutOptions,
): { forest: Forest; field: FlowField; cut: CutForest | null } {
  judgeCut(record, { keepAbove, keepOrder });
  if (keepAbove === undefined && keepOrder === undefined) return { forest: record.forest, field: whole, cut: null };
  const cut = cutForest(record.forest, { keepAbove, keepOrder });
  return { forest: cut.forest, field: cutField(cut, whole), cut };
}

/** Extensions that ended before another vessel, as problems of the mesh. */
function shortExtensions(
  mesh: LumenMesh,
  short: readonly ShortExtension[],
  numberOf: (row: number) => number,
): LumenProblem[] {
  return short.map(({ row, blocker, got, wanted }) => {
    const patch = mesh.patches.find((one) => one.row === row)!;
    const tell = (length: number) => `${Number(fromSi(length, 'um').toPrecision(4))} µm`;
    const why = `the extension of ${patch.name} is ${tell(got)} long, wanted ${tell(wanted)}: vessel ${numberOf(blocker)} is in the way`;
    return { row, vessel: patch.vessel, why };
  });
}

/** Refuses a cut that leaves nothing of a tree, by the tree's name. */
function judgeCut(record: TreeRecord, { keepAbove = 0, keepOrder = 1 }: CutOptions): void {
  if (!(keepAbove > 0 || keepOrder > 1)) return;
  const { forest, names } = record;
  const order = strahlerOrders(forest);
  const short = (length: number) => Number(fromSi(length, 'um').toPrecision(4));
  for (const [t, name] of names.entries()) {
    const root = forest.treeStart[t]!;
    let [widest, highest, any] = [0, 0, false];
    for (let i = root + 1; i < forest.treeStart[t + 1]!; i++) {
      if (forest.parent[i] !== root) continue;
      any ||= forest.radius[i]! >= keepAbove && order[i]! >= keepOrder;
      widest = Math.max(widest, forest.radius[i]!);
      highest = Math.max(highest, order[i]!);
    }
    if (any) continue;
    const narrow = widest < keepAbove;
    const got = narrow
      ? `got ${short(keepAbove)} µm, but tree ${name} begins with a vessel of radius ${short(widest)} µm`
      : `got ${keepOrder}, but tree ${name} begins with a vessel of order ${highest}`;
    const wanted = narrow ? `expected at most ${short(widest)} µm` : `expected at most ${highest}`;
    throw inputError('nothing-left', narrow ? 'keepAbove' : 'keepOrder', `${got}, ${wanted}`);
  }
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

/** A mesh folder's files with a printable negative among them. */
export interface NegativeResult {
  readonly files: readonly NamedBytes[];
  /** What it came to, as `mesh.json` has it. */
  readonly notes: NegativeNotes;
}

/** Diameters by which first vessels are drawn out so that they open at the block's surface. */
const THROUGH = 3;

/**
 * Adds `negative.stl` and `negative.3mf` to the files of a mesh folder: the tissue's block with the lumen taken out, as
 * one closed solid with channels that open at the roots. The mesh's own options decide what of the tree is printed.
 *
 * @param surfaces  what was read of each surface file the spec's tissue names
 * @param leastWall m, thickness below which walls are told as problems; 0 where left out
 * @throws InputError for a tree without a spec, which tells the tissue
 */
export async function addNegative(
  made: MeshResult,
  record: TreeRecord,
  grown: Spec | null,
  surfaces: ReadonlyMap<string, TriangleSurface>,
  options: MeshOptions,
  leastWall = 0,
): Promise<NegativeResult> {
  if (grown === null)
    throw inputError('no-spec', 'tree', 'got a tree without a spec, expected one that tells the tissue to print');
  const tissue = buildTissue(grown.tissue, surfaces, grown.forbidden);
  const { forest, cut } = partOf(record, record.field ?? solveRecord(record.forest, grown).field!, options);
  const open = extendCaps(forest, THROUGH, 'roots').forest;
  const lumen = buildLumen(open, { around: options.around, axialStretch: options.axialStretch });
  const negative = await makeNegative(lumen, grown.tissue, surfaces);
  const wall = measureWall(forest, tissue);
  const numberOf = (row: number): number => cut?.vesselNumbers[row] ?? vesselOfRow(forest, row);
  return {
    ...addNegativeFiles(made.files, negative, {
      unit: options.unit ?? 'm',
      leastWall,
      between: wall.between,
      betweenVessels: wall.rows[0] < 0 ? null : [numberOf(wall.rows[0]), numberOf(wall.rows[1])],
      outer: wall.outer,
      outerVessel: wall.outerRow < 0 ? null : numberOf(wall.outerRow),
    }),
  };
}

import { InvariantError } from '../../core/errors.ts';
import { type BoundaryRow, boundaryTable } from '../../mesh/boundary-table.ts';
import { type InletProfile, inletProfile } from '../../mesh/inlet-profile.ts';
import type { LumenMesh } from '../../mesh/lumen.ts';
import { networkTable } from '../../mesh/network-table.ts';
import type { FlowField, Forest, TreeKind } from '../../tree/forest.ts';
import type { NamedBytes } from '../format.ts';
import { encodeFillScript } from '../solver/fill-script.ts';
import { CASE_FOLDER, encodeOpenfoamCase } from '../solver/openfoam-case.ts';
import type { MeshUnit } from './length-unit.ts';
import { encodeLumenVtp } from './lumen-vtp.ts';
import { MESH_FORMATS } from './mesh-formats.ts';
import { type CutNotes, describeFile, encodeMeshJson, type FileNotes } from './mesh-json.ts';
import { surfaceOfLumen } from './mesh-surface.ts';
import { encodeLumenMsh } from './msh.ts';
import { BINARY_ABOVE, encodeBinaryStl, encodeNamedStl, encodeSingleStl } from './stl.ts';
import { type DropRow, encodeBoundaryCsv, encodeNetworkCsv, encodeProfileCsv } from './tables.ts';

export interface MeshFolderInput {
  readonly mesh: LumenMesh;
  /** The forest that was meshed, and its flow. */
  readonly forest: Forest;
  readonly field: FlowField;
  readonly kinds: readonly TreeKind[];
  /** Unit of the surface files; metres where left out. Tables are in metres always. */
  readonly unit?: MeshUnit | undefined;
  readonly axialStretch?: number | undefined;
  /** kg/m³ */
  readonly density: number;
  /** Pa·s where it is the same everywhere, else null. */
  readonly viscosity: number | null;
  /** Where part of a forest was meshed (see mesh/cut-forest.ts). */
  readonly cut?:
    | {
        readonly notes: Omit<CutNotes, 'patches'>;
        readonly source: ArrayLike<number>;
        readonly vesselNumbers: ArrayLike<number>;
        readonly resistances: ArrayLike<number>;
      }
    | undefined;
  /** The networks of axis lengths and of effective lengths; `field` is one of them. */
  readonly networks?:
    | {
        readonly used: 'axis' | 'effective';
        /** (n) m */
        readonly effectiveLengths: ArrayLike<number>;
        /** (n) Pa at the nodes of either. */
        readonly axis: ArrayLike<number>;
        readonly effective: ArrayLike<number>;
      }
    | undefined;
  readonly facts?: Readonly<Record<string, unknown>> | undefined;
  /** Where caps were moved out: diameters asked for, (n) m that each row's cap was moved. */
  readonly extension?: { readonly diameters: number; readonly got: ArrayLike<number> } | undefined;
  /** Velocities at inlets, written as `inlet_profile.csv`. */
  readonly profile?: InletProfile | undefined;
  /** Input for meshers and flow solvers. */
  readonly solverFiles?: readonly ('gmsh' | 'openfoam')[] | undefined;
}

/** The files of a mesh folder, by name. */
export function encodeMeshFolder(input: MeshFolderInput): NamedBytes[] {
  const { mesh, forest, field, kinds, cut } = input;
  const unit = input.unit ?? 'm';
  const binary = mesh.triangle.length / 3 > BINARY_ABOVE;
  const boundary = boundaryTable(mesh, forest, field, input.density, cut?.resistances);
  const network = networkTable(forest, field, {
    kinds,
    source: cut?.source,
    vesselNumbers: cut?.vesselNumbers,
    effectiveLengths: input.networks?.effectiveLengths,
  });
  const drops = input.networks === undefined ? null : dropsOf(mesh, forest, input.networks);
  const cutNotes: CutNotes | null =
    cut === undefined
      ? null
      : {
          ...cut.notes,
          patches: mesh.patches.filter((patch) => patch.row >= 0 && cut.resistances[patch.row]! > 0).map((p) => p.name),
        };
  const files: NamedBytes[] = [
    { name: 'lumen.stl', bytes: binary ? encodeBinaryStl(mesh, unit) : encodeNamedStl(mesh, unit) },
    { name: 'lumen.vtp', bytes: encodeLumenVtp(surfaceOfLumen(mesh, forest, field, unit)) },
    { name: 'lumen.msh', bytes: encodeLumenMsh(mesh, unit) },
    { name: 'boundary.csv', bytes: encodeBoundaryCsv(boundary, drops) },
    { name: 'network.csv', bytes: encodeNetworkCsv(network) },
    {
      name: 'mesh.json',
      bytes: encodeMeshJson({
        mesh,
        forest,
        unit,
        axialStretch: input.axialStretch ?? 1,
        binary,
        files: describeFiles(input, unit, binary),
        density: input.density,
        viscosity: input.viscosity,
        cut: cutNotes,
        network:
          drops === null
            ? undefined
            : {
                lengths: input.networks!.used,
                drops: boundary.flatMap((row, k) =>
                  row.resistance === null ? [] : [{ patch: row.patch, ...drops[k]! }],
                ),
              },
        extension: input.extension,
        profile: input.profile,
        facts: input.facts,
      }),
    },
  ];
  // A binary file is one solid already.
  if (!binary) files.splice(1, 0, { name: 'lumen_one_solid.stl', bytes: encodeSingleStl(mesh, unit) });
  return [...files, ...forSolvers(input, boundary)];
}

/** Drops of both networks between a tree's root and each cap, in the order of the boundary table. */
function dropsOf(mesh: LumenMesh, forest: Forest, networks: NonNullable<MeshFolderInput['networks']>): DropRow[] {
  return mesh.patches
    .filter(({ kind }) => kind !== 'wall')
    .map(({ row, tree }) => {
      const root = forest.treeStart[tree]!;
      const drop = (pressure: ArrayLike<number>) => Math.abs(pressure[root]! - pressure[row]!);
      return { lengths: networks.used, axis: drop(networks.axis), effective: drop(networks.effective) };
    });
}

/** What meshers and flow solvers take beside the surface. */
function forSolvers(input: MeshFolderInput, boundary: readonly BoundaryRow[]): NamedBytes[] {
  const { mesh, profile, solverFiles = [], density, viscosity, unit = 'm' } = input;
  const files: NamedBytes[] = [];
  if (profile !== undefined) {
    const bytes = encodeProfileCsv(inletProfile(mesh, boundary, profile));
    files.push({ name: 'inlet_profile.csv', bytes });
  }
  // A case for a flow solver is filled by the script for the mesher.
  if (solverFiles.length > 0) files.push({ name: 'fill.geo', bytes: encodeFillScript() });
  if (solverFiles.includes('openfoam')) {
    if (viscosity === null) throw new InvariantError('forSolvers: got no viscosity for a flow solver');
    files.push(...encodeOpenfoamCase({ boundary, density, viscosity, profile: profile ?? 'flat', unit }));
  }
  return files;
}

/** What a folder has, `mesh.json` and further surface formats apart. */
function describeFiles(
  { profile, solverFiles = [] }: Pick<MeshFolderInput, 'profile' | 'solverFiles'>,
  unit: MeshUnit,
  binary: boolean,
): FileNotes[] {
  const surfaces: FileNotes[] = MESH_FORMATS.filter(({ always }) => always).map((format) => describeFile(format, unit));
  const [stl] = surfaces;
  if (!binary) surfaces.splice(1, 0, { ...stl!, name: 'lumen_one_solid.stl', holds_no: ['patches', ...stl!.holds_no] });
  else surfaces[0] = { ...stl!, holds_no: [...stl!.holds_no, 'digits beyond float32'] };
  const others = ['boundary.csv', 'network.csv'];
  if (profile !== undefined) others.push('inlet_profile.csv');
  if (solverFiles.length > 0) others.push('fill.geo');
  if (solverFiles.includes('openfoam')) others.push(CASE_FOLDER);
  return [...surfaces, ...others.map((name): FileNotes => ({ name, unit: 'm', holds_no: [] }))];
}

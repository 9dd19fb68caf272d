import { encodeText } from '../../core/text.ts';
import type { LumenMesh } from '../../mesh/lumen.ts';
import { type LumenFigures, measureLumen } from '../../mesh/measure-lumen.ts';
import type { Forest } from '../../tree/forest.ts';
import { countVessels, tubeLength } from '../../tree/vessels.ts';
import type { MeshUnit } from './length-unit.ts';
import { lumenFile, type MeshFormat } from './mesh-formats.ts';
import type { DropRow } from './tables.ts';

/** What was left out of a mesh. */
export interface CutNotes {
  /** m, or null where radius did not decide. */
  readonly keepAbove: number | null;
  /** Strahler order, or null. */
  readonly keepOrder: number | null;
  /** Vessels cut off. */
  readonly removed: number;
  /** Names of the patches behind which something was cut off. */
  readonly patches: readonly string[];
}

/** A file of the folder: its name, its unit of length, and what of the surface it cannot hold. */
export interface FileNotes {
  readonly name: string;
  readonly unit: MeshUnit;
  readonly holds_no: readonly string[];
}

export function describeFile(format: MeshFormat, unit: MeshUnit): FileNotes {
  return { name: lumenFile(format), unit: format.unitOf(unit), holds_no: format.drops };
}

export interface MeshNotesInput {
  readonly mesh: LumenMesh;
  readonly forest: Forest;
  readonly unit: MeshUnit;
  readonly axialStretch: number;
  readonly binary: boolean;
  /** The other files of the folder. */
  readonly files: readonly FileNotes[];
  /** kg/m³ */
  readonly density: number;
  /** Pa·s where it is the same everywhere, else null. */
  readonly viscosity: number | null;
  readonly cut: CutNotes | null;
  /** Which network the tables give, and the drops of both to each cap but roots. */
  readonly network?:
    | { readonly lengths: 'axis' | 'effective'; readonly drops: readonly (DropRow & { readonly patch: string })[] }
    | undefined;
  /** Where caps were moved out: diameters asked for, (n) m that each row's cap was moved. */
  readonly extension?: { readonly diameters: number; readonly got: ArrayLike<number> } | undefined;
  /** Profile of the velocities in `inlet_profile.csv`. */
  readonly profile?: string | undefined;
  /** Anything else the caller wants told: seed, version, exponent. */
  readonly facts?: Readonly<Record<string, unknown>> | undefined;
}

/**
 * Where the pressures of the tables are not those of a three-dimensional solution; figures as measured on reference
 * surfaces, blood of 3.5 mPa·s.
 */
export const LIMITS: readonly string[] = [
  'Pressures and shear are those of a network of straight tubes with developed laminar flow (Hagen–Poiseuille); junctions cost nothing in it.',
  'Short vessels: expect the drop in three dimensions to differ by about -3 % at a length of 4 diameters, -6 % at 2.5, -11 % at 1.5.',
  'Side branches much thinner than their parent begin inside its lumen: their drop is smaller than tabled, by 9 to 18 % where they are 4 diameters long.',
  'Fillets at junctions, here at most 0.3 radii of the thinner vessel wide, lower the drop by about 2 %.',
  'The network of effective lengths (effective_length_m in network.csv) takes off vessels what lies in the lumen of others; on ten grown trees of 3 to 16 caps its drops were -2.5 to 1.6 % off a Stokes solution in the mesh, those of axis lengths 1.6 to 16 %.',
  'Inertia is not in the network: compare at Reynolds numbers below 10; at 300 drops differ by several per cent to ten.',
  'A wall of facets is not round: with corners on the circle, edges of 0.3 radii gave 3.5 % more drop and edges of 0.2 radii 1.9 %; here rings have the area of the circle, so expect less.',
];

/**
 * `mesh.json`: what the other files of a mesh folder are, how good the surface is, and what the network leaves out.
 *
 * `patches` lists the patch names by number, which the attribute word of a binary STL refers to.
 */
export function encodeMeshJson(input: MeshNotesInput): Uint8Array {
  const { mesh, forest, cut } = input;
  const figures = measureLumen(mesh);
  const notes = {
    ...input.facts,
    unit: input.unit,
    tables_unit: 'm',
    around: mesh.around,
    axial_stretch: input.axialStretch,
    stl: input.binary ? 'binary, float32, patch number in the attribute word' : 'ASCII, one solid a patch',
    density_kg_m3: input.density,
    viscosity_Pa_s: input.viscosity,
    patches: mesh.patches.map((patch) => patch.name),
    counts: {
      vertices: figures.vertices,
      edges: figures.edges,
      triangles: figures.triangles,
      vessels: countVessels(forest),
      caps: mesh.patches.length - 1,
      components: figures.components,
    },
    quality: qualityOf(figures, forest),
    inside_point_m: insidePoints(mesh, forest)[0],
    inside_points_m: insidePoints(mesh, forest),
    cut_off:
      cut === null
        ? null
        : {
            keep_above_m: cut.keepAbove,
            keep_order: cut.keepOrder,
            vessels: cut.removed,
            patches: cut.patches,
          },
    extensions: input.extension === undefined ? null : extensionsOf(mesh, input.extension),
    inlet_profile: input.profile ?? null,
    network:
      input.network === undefined
        ? null
        : {
            lengths: input.network.lengths,
            drops: input.network.drops.map(({ patch, axis, effective }) => ({
              patch,
              axis_Pa: axis,
              effective_Pa: effective,
            })),
          },
    problems: mesh.problems.map(({ vessel, why }) => ({ vessel, why })),
    limits: LIMITS,
    files: input.files,
  };
  return encodeText(`${JSON.stringify(notes, null, 2)}\n`);
}

function qualityOf(figures: LumenFigures, forest: Forest): Record<string, number> {
  let network = 0;
  for (let row = 0; row < forest.count; row++) {
    const r = forest.radius[row]!;
    network += Math.PI * r * r * tubeLength(forest, row);
  }
  return {
    smallest_angle_deg: (figures.smallestAngle * 180) / Math.PI,
    longest_edge_m: figures.longestEdge,
    open_edges: figures.openEdges,
    misoriented_edges: figures.misorientedEdges,
    euler_characteristic: figures.euler,
    volume_m3: figures.volume,
    network_volume_m3: network,
    area_m2: figures.area,
    wall_area_m2: figures.wallArea,
  };
}

/** Lengths by which caps were moved out, by patch. */
function extensionsOf(
  mesh: LumenMesh,
  { diameters, got }: { readonly diameters: number; readonly got: ArrayLike<number> },
): Record<string, unknown> {
  const caps = mesh.patches.filter((patch) => patch.row >= 0);
  return { diameters, length_m: Object.fromEntries(caps.map((cap) => [cap.name, got[cap.row]!])) };
}

/** A point on the axis of each tree's first vessel, halfway. */
function insidePoints(mesh: LumenMesh, forest: Forest): number[][] {
  const points: number[][] = [];
  for (const patch of mesh.patches) {
    if (patch.row < 0 || forest.parent[patch.row]! >= 0) continue;
    const child = patch.row + 1;
    points.push([0, 1, 2].map((k) => 0.5 * (forest.position[3 * patch.row + k]! + forest.position[3 * child + k]!)));
  }
  return points;
}

import { Tally, type TallyHead } from '../result.ts';

export interface LumenTallies {
  readonly closed: Tally;
  readonly manifold: Tally;
  readonly oriented: Tally;
  readonly outward: Tally;
  readonly components: Tally;
  readonly genus: Tally;
  readonly simple: Tally;
  readonly angle: Tally;
  readonly patches: Tally;
  readonly disc: Tally;
  readonly flat: Tally;
  readonly square: Tally;
  readonly area: Tally;
  readonly centre: Tally;
  readonly rimCount: Tally;
  readonly rimEdge: Tally;
  readonly straight: Tally;
  readonly normal: Tally;
  readonly boundaryFlow: Tally;
  readonly boundaryPressure: Tally;
  readonly values: Tally;
  readonly drop: Tally;
  readonly networkFlow: Tally;
  readonly ends: Tally;
  readonly lengths: Tally;
  readonly drops: Tally;
  readonly resistance: Tally;
  readonly boundaryNames: Tally;
  readonly files: Tally;
  readonly vtp: Tally;
  readonly msh: Tally;
  readonly oneSolid: Tally;
  readonly counts: Tally;
  readonly inside: Tally;
}

/** How the things that are measured are named. */
export interface LumenNames {
  readonly triangle: (face: number) => string;
  readonly patch: (row: number) => string;
  readonly segment: (row: number) => string;
}

/** Longest rim edge in radii that a default mesh may have. */
const LONGEST_EDGE = 0.3;
/** Rim edges of a default mesh. */
const DEFAULT_AROUND = 24;

/**
 * The promises of a lumen mesh with their limits, before anything was looked at.
 *
 * @param around segments asked for round a vessel; fewer than 24 allow as few rim edges, and edges as long as those of
 *               a regular polygon of that many (a tenth more for caps that are drawn to the circle's area)
 */
export function createLumenTallies(around: number, names: LumenNames, cap: number): LumenTallies {
  const tally = (
    id: string,
    title: string,
    [sense, limit, unit]: readonly ['at-least' | 'at-most', number, string],
    nameOf: TallyHead['nameOf'],
    describe: TallyHead['describe'],
  ) => new Tally({ id, title, sense, limit, unit, tolerance: unit === 'rad' ? 1e-6 : 0, nameOf, describe, cap });
  const none = ['at-most', 0, '1'] as const;
  const most = (limit: number, unit = '1') => ['at-most', limit, unit] as const;
  const degree = Math.PI / 180;
  const { triangle, patch, segment } = names;
  const rimEdge = around < DEFAULT_AROUND ? 2.2 * Math.sin(Math.PI / around) : LONGEST_EDGE;
  const shorten = (value: number) => String(Number(value.toPrecision(4)));
  return {
    closed: tally('mesh-closed', 'no open edge', none, triangle, () => 'an edge of the triangle is open'),
    manifold: tally(
      'mesh-manifold',
      'no edge of more than two triangles, one fan at every corner',
      none,
      triangle,
      (value) => `an edge of the triangle has ${value + 2} triangles`,
    ),
    oriented: tally(
      'mesh-oriented',
      'neighbours are oriented alike',
      none,
      triangle,
      () => 'the triangle and a neighbour are oriented against each other',
    ),
    outward: tally(
      'mesh-outward',
      'normals point out of the lumen',
      ['at-least', 1, '1'],
      triangle,
      () => 'the part that the triangle belongs to is inside out, or has no volume',
    ),
    components: tally('mesh-components', 'one part a tree', none, triangle, (value) => `${value} parts off`),
    genus: tally(
      'mesh-genus',
      'every part is a sphere with no handle',
      none,
      triangle,
      (value) => `the part that the triangle belongs to has V − E + F off by ${value} from 2`,
    ),
    simple: tally(
      'mesh-simple',
      'no triangle meets another',
      none,
      triangle,
      (_, __, other) => `the triangle meets ${triangle(other)}`,
    ),
    angle: tally(
      'mesh-angle',
      'no angle below 15°',
      ['at-least', 15 * degree, 'rad'],
      triangle,
      (value) => `smallest angle ${shorten(value / degree)}°, wanted 15°`,
    ),
    patches: tally('mesh-patches', 'patches are named well and as in boundary.csv', none, patch, () => ''),
    disc: tally('cap-disc', 'every cap is one disc whose rim borders the wall', none, patch, () => ''),
    flat: tally(
      'cap-flat',
      'caps are flat',
      most(1e-3),
      patch,
      (value) => `the cap is ${shorten(value)} radii out of plane, allowed 0.001`,
    ),
    square: tally(
      'cap-square',
      'caps are square to their vessel',
      most(degree, 'rad'),
      patch,
      (value) => `the cap is ${shorten(value / degree)}° askew, allowed 1°`,
    ),
    area: tally(
      'cap-area',
      'caps have the area of their vessel',
      most(0.02),
      patch,
      (value) => `area is off by ${shorten(100 * value)} %, allowed 2 %`,
    ),
    centre: tally(
      'cap-centre',
      'caps are centred on their vessel',
      most(0.01),
      patch,
      (value) => `the cap is ${shorten(value)} radii off centre, allowed 0.01`,
    ),
    rimCount: tally(
      'cap-rim',
      'rims have the edges asked for',
      ['at-least', Math.min(around, DEFAULT_AROUND), '1'],
      patch,
      (value) => `the rim has ${value} edges, wanted ${Math.min(around, DEFAULT_AROUND)} or more`,
    ),
    rimEdge: tally(
      'cap-rim-edge',
      'rim edges are short',
      most(rimEdge),
      patch,
      (value) => `longest rim edge ${shorten(value)} radii, allowed ${shorten(rimEdge)}`,
    ),
    straight: tally(
      'cap-straight',
      'the wall before a cap is a straight tube for two radii',
      most(0.02),
      patch,
      (value) => `the wall strays by ${shorten(value)} radii within two radii of the cap, allowed 0.02`,
    ),
    normal: tally(
      'boundary-normal',
      'normals of boundary.csv have unit length',
      most(1e-6),
      patch,
      (value) => `length of the normal is off by ${shorten(value)}`,
    ),
    boundaryFlow: tally(
      'boundary-flow',
      'boundary.csv conserves flow in each tree',
      most(1e-9),
      patch,
      (value) => `flows of the patch's tree are off by ${value.toExponential(3)} of the inflow`,
    ),
    boundaryPressure: tally(
      'boundary-pressure',
      'inlet pressures are the highest',
      most(0, 'Pa'),
      patch,
      (value) => `an outlet of the patch's tree is ${shorten(value)} Pa above an inlet`,
    ),
    values: tally(
      'boundary-values',
      'velocities and Reynolds numbers of boundary.csv follow from flow and radius',
      most(1e-6),
      patch,
      (value) => `velocity or Reynolds number is off by ${value.toExponential(3)}`,
    ),
    drop: tally(
      'network-drop',
      'pressures of network.csv obey the tube law',
      most(1e-6),
      segment,
      (value) => `pressure drop is off by ${value.toExponential(3)} of the whole`,
    ),
    networkFlow: tally(
      'network-flow',
      'network.csv conserves flow at its nodes',
      most(1e-9),
      segment,
      (value) => `flows at an end are off by ${value.toExponential(3)} of the largest`,
    ),
    ends: tally(
      'network-ends',
      'pressures of boundary.csv are those of network.csv',
      most(1e-6),
      patch,
      (value) => `pressure is off by ${value.toExponential(3)} of the whole drop`,
    ),
    lengths: tally(
      'network-lengths',
      'lengths and effective lengths of network.csv follow from its places and radii',
      most(1e-6),
      segment,
      (value) => `a length is off by ${value.toExponential(3)} of itself`,
    ),
    drops: tally(
      'network-drops',
      'drops that boundary.csv and mesh.json state are those of both networks',
      most(1e-6),
      patch,
      (value) => `a drop is off by ${value.toExponential(3)} of itself`,
    ),
    resistance: tally('boundary-resistance', 'resistances stand where something was cut off', none, patch, () => ''),
    boundaryNames: tally(
      'boundary-names',
      'type, tree and vessel of boundary.csv are those of the patch names',
      none,
      patch,
      () => '',
    ),
    files: tally('folder-files', 'the folder holds every file of a mesh', none, patch, () => ''),
    vtp: tally('file-vtp', 'lumen.vtp holds the triangles and patches of lumen.stl', none, triangle, () => ''),
    msh: tally('file-msh', 'lumen.msh holds the triangles and patches of lumen.stl', none, triangle, () => ''),
    oneSolid: tally('file-one-solid', 'lumen_one_solid.stl holds the triangles of lumen.stl', none, triangle, () => ''),
    counts: tally('notes-counts', 'counts of mesh.json are those of the files', none, triangle, () => ''),
    inside: tally('notes-inside', 'points of mesh.json lie inside the lumen, one a part', none, triangle, () => ''),
  };
}

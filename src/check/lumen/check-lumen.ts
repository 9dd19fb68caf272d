import { InputError } from '../../core/errors.ts';
import { decodeText } from '../../core/text.ts';
import { type CheckResult, gatherResult, type PromiseResult, type Tally } from '../result.ts';
import { type BoundaryTable, measureBoundary, readBoundary } from './boundary.ts';
import { lookAtBoundaryNames, lookAtResistances } from './boundary-names.ts';
import { measureCaps } from './caps.ts';
import { findCrossings } from './crossings.ts';
import { lookAtDrops } from './drops.ts';
import { lookAtLengths, shortenSegments } from './lengths.ts';
import { createLumenTallies, type LumenTallies } from './lumen-tallies.ts';
import { readMshSolids } from './msh-file.ts';
import { checkNegative } from './negative.ts';
import { measureNetwork, networkAxis, readNetwork } from './network.ts';
import { lookAtCounts, lookAtInsidePoints } from './note-figures.ts';
import { type MeshNotes, readMeshNotes } from './notes.ts';
import { isBinary, readSolids, type Solids } from './solids.ts';
import { type Components, type Edges, listEdges, measureComponents } from './topology.ts';
import { printedSlack, Reference } from './twins.ts';
import { checkVolume } from './volume.ts';
import { readVtpSolids, type StatedSolids } from './vtp-file.ts';
import { type Welded, weldCorners } from './weld.ts';

/** The files of a mesh folder that the checker reads, as bytes. */
export interface LumenFiles {
  /** `lumen.stl` */
  readonly surface: Uint8Array;
  /** `boundary.csv` */
  readonly boundary: Uint8Array;
  /** `network.csv`. Here and below: null where the folder lacks the file, left out where it was not looked for. */
  readonly network?: Uint8Array | null | undefined;
  /** `mesh.json` */
  readonly notes?: Uint8Array | null | undefined;
  /** `lumen.vtp` */
  readonly vtp?: Uint8Array | null | undefined;
  /** `lumen.msh` */
  readonly msh?: Uint8Array | null | undefined;
  /** `lumen_one_solid.stl`, which is not written beside a binary `lumen.stl`. */
  readonly oneSolid?: Uint8Array | null | undefined;
  /** `lumen_volume.vtu`, which is written where it was asked for. */
  readonly volume?: Uint8Array | null | undefined;
  /** `negative.stl`, which is written where it was asked for. */
  readonly negative?: Uint8Array | null | undefined;
}

export interface CheckLumenOptions {
  /** Findings listed a promise, ≥ 0; default 20. */
  readonly cap?: number | undefined;
}

const LEGAL_NAME = /^[A-Za-z][A-Za-z0-9_]*$/;

/**
 * Recomputes every promise of a lumen mesh from its files.
 *
 * The other surface files are held to `lumen.stl`; one of them that is cut short breaks its promise.
 *
 * @throws InputError where `lumen.stl`, a table or `mesh.json` is not what its name says, naming the lines
 * Cost: O(f log f); 10⁵ triangles take about 3 s.
 */
export function checkLumen(files: LumenFiles, options: CheckLumenOptions = {}): CheckResult {
  const notes = readMeshNotes('mesh.json', files.notes ? decodeText(files.notes) : null);
  const boundary = readBoundary('boundary.csv', decodeText(files.boundary));
  const network = files.network ? readNetwork('network.csv', decodeText(files.network)) : null;
  const binaryNames = notes.patches ?? ['wall', ...boundary.name];
  const solids = scaleSolids(readSolids('lumen.stl', files.surface, binaryNames), notes.unit);
  const mesh = weldCorners(solids);
  const nameOf = (face: number) => (face < 0 ? 'lumen' : `${solids.names[solids.solid[face]!]}:${face}`);
  const segment = (row: number) => `segment ${network?.name[row] ?? row}`;
  const cap = options.cap ?? 20;
  const names = { triangle: nameOf, patch: (row: number) => boundary.name[row] ?? `row ${row}`, segment };
  const tallies = createLumenTallies(notes.around, names, cap);

  const edges = listEdges(mesh);
  const components = measureComponents(mesh, edges);
  lookAtEdges(mesh, edges, tallies);
  lookAtComponents(mesh, components, boundary, solids, tallies);
  findCrossings(mesh, (f, g) => tallies.simple.see(1, f, g));
  tallies.simple.checked = mesh.triangle.length / 3;
  measureAngles(mesh, tallies.angle);

  lookAtNames(solids, boundary, tallies.patches);
  const rowOf = new Map(boundary.name.map((name, row) => [name, row]));
  const rowOfSolid = solids.names.map((name) => (name === 'wall' ? -1 : (rowOf.get(name) ?? -2)));
  const patchOf = solids.solid.map((solid) => rowOfSolid[solid]!);
  measureCaps(mesh, edges, patchOf, boundary, network === null ? () => null : networkAxis(network), tallies);
  measureBoundary(boundary, notes.density / notes.viscosity, {
    flow: tallies.boundaryFlow,
    normal: tallies.normal,
    values: tallies.values,
    pressure: tallies.boundaryPressure,
  });
  const networkTallies = { drop: tallies.drop, flow: tallies.networkFlow, ends: tallies.ends };
  if (network !== null) {
    const shortened = shortenSegments(network);
    const lengths = notes.lengths === 'axis' ? network.length : (network.effectiveLength ?? shortened);
    measureNetwork(network, boundary, lengths, notes.viscosity, networkTallies);
    lookAtLengths(network, shortened, tallies.lengths);
    const stated = boundary.drops !== null || notes.drops !== null;
    if (stated && !Number.isNaN(notes.viscosity)) lookAtDrops(network, shortened, boundary, notes, tallies.drops);
  }

  lookAtBoundaryNames(boundary, network, tallies.boundaryNames);
  lookAtResistances(boundary, notes.cutPatches, tallies.resistance);
  const binary = isBinary(files.surface);
  lookAtFiles(files, binary, tallies.files);
  const reference = new Reference(mesh, solids, printedSlack(mesh.position, binary));
  const unread = lookAtTwins(files, binary, reference, notes, tallies);
  if (notes.counts !== null) {
    const counted = {
      vertices: mesh.position.length / 3,
      edges: edges.count,
      triangles: mesh.triangle.length / 3,
      vessels: network?.count ?? null,
      caps: boundary.count,
      components: components.count,
    };
    lookAtCounts(notes.counts, counted, tallies.counts);
  } else unread.set(tallies.counts, 'mesh.json gives no counts');
  if (notes.insidePoint !== undefined || notes.insidePoints !== undefined)
    lookAtInsidePoints(notes, mesh, components, tallies.inside);
  else unread.set(tallies.inside, 'mesh.json gives no point');

  const all = Object.values(tallies) as Tally[];
  if (files.negative) {
    const negative = checkNegative(files.negative, notes.unit, notes.negative, network, cap);
    all.push(...negative.tallies);
    for (const [tally, why] of negative.unread) unread.set(tally, why);
  }
  if (files.volume) {
    const volume = checkVolume(
      files.volume,
      {
        unit: notes.unit,
        unitName: notes.unitName,
        solids,
        volume: components.volume.reduce((sum, one) => sum + one, 0),
        area: areaOf(mesh),
        slack: printedSlack(mesh.position, binary),
        around: notes.around,
        boundary,
        network,
      },
      cap,
    );
    all.push(...volume.tallies);
    for (const [tally, why] of volume.unread) unread.set(tally, why);
  }
  const promises = all.map((tally) => {
    const why = unread.get(tally);
    return why === undefined ? closeTally(tally, tallies, notes, network !== null) : tally.skip(why);
  });
  return gatherResult(promises, all, [], {
    triangles: mesh.triangle.length / 3,
    vertices: mesh.position.length / 3,
    components: components.count,
    volume_m3: components.volume.reduce((sum, volume) => sum + volume, 0),
  });
}

function closeTally(tally: Tally, tallies: LumenTallies, notes: MeshNotes, network: boolean): PromiseResult {
  const ofNetwork = [tallies.drop, tallies.networkFlow, tallies.ends, tallies.lengths, tallies.drops];
  if (!network && ofNetwork.includes(tally)) {
    return tally.skip('no network.csv');
  }
  if ((tally === tallies.drop || tally === tallies.drops) && Number.isNaN(notes.viscosity))
    return tally.skip('mesh.json gives no viscosity');
  if (tally === tallies.drops && tally.checked === 0) return tally.skip('no drops are stated');
  if (tally === tallies.square && !network) return tally.close("no network.csv: against the table's normals only");
  if (tally === tallies.values && Number.isNaN(notes.density / notes.viscosity)) {
    return tally.close('mesh.json gives no density or viscosity: velocities only');
  }
  return tally.close();
}

/** Names the files that the program always writes and the folder lacks. */
function lookAtFiles(files: LumenFiles, binary: boolean, tally: Tally): void {
  tally.checked += 2;
  const others = [
    ['network.csv', files.network],
    ['mesh.json', files.notes],
    ['lumen.vtp', files.vtp],
    ['lumen.msh', files.msh],
    ['lumen_one_solid.stl', binary ? undefined : files.oneSolid],
  ] as const;
  for (const [name, bytes] of others) {
    if (bytes === undefined) continue;
    tally.checked++;
    if (bytes === null) tally.fail(name, -1, 1, 0, 'the folder lacks the file');
  }
}

/**
 * Holds the other surface files to `lumen.stl`.
 *
 * @returns why a promise could not be looked at
 */
function lookAtTwins(
  files: LumenFiles,
  binary: boolean,
  reference: Reference,
  notes: MeshNotes,
  tallies: LumenTallies,
): Map<Tally, string> {
  const unread = new Map<Tally, string>();
  const look = (
    file: string,
    bytes: Uint8Array | null | undefined,
    tally: Tally,
    read: (file: string, bytes: Uint8Array) => Solids & Partial<Pick<StatedSolids, 'unit'>>,
  ) => {
    if (bytes === undefined || bytes === null) {
      unread.set(tally, bytes === null ? `no ${file}` : `${file} was not looked for`);
      return;
    }
    try {
      const twin = read(file, bytes);
      if (twin.unit !== undefined && twin.unit !== notes.unitName)
        tally.fail(file, -1, 1, 0, `unit of length: got ${twin.unit ?? 'none'}, mesh.json says ${notes.unitName}`);
      reference.compare(file, scaleSolids(twin, notes.unit), tally !== tallies.oneSolid, tally);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      for (const { where, message } of error.faults) tally.fail(where, -1, 1, 0, message);
    }
  };
  look('lumen.vtp', files.vtp, tallies.vtp, readVtpSolids);
  look('lumen.msh', files.msh, tallies.msh, readMshSolids);
  look('lumen_one_solid.stl', files.oneSolid, tallies.oneSolid, (file, bytes) => {
    const solids = readSolids(file, bytes, ['lumen']);
    if (solids.names.length !== 1) tallies.oneSolid.fail(file, -1, 1, 0, `got ${solids.names.length} solids`);
    return solids;
  });
  if (binary && !files.oneSolid) unread.set(tallies.oneSolid, 'a binary lumen.stl is one solid already');
  return unread;
}

/** Scales file units to metres. */
function scaleSolids(solids: Solids, unit: number): Solids {
  return unit === 1 ? solids : { ...solids, corner: solids.corner.map((x) => x * unit) };
}

function lookAtEdges(mesh: Welded, edges: Edges, tallies: LumenTallies): void {
  const { triangle, position } = mesh;
  for (let e = 0; e < edges.count; e++) {
    const from = edges.sideStart[e]!;
    const sides = edges.sideStart[e + 1]! - from;
    const first = edges.side[from]!;
    const face = Math.floor(first / 3);
    tallies.closed.see(sides === 1 ? 1 : 0, face);
    tallies.manifold.see(Math.max(0, sides - 2), face);
    if (sides === 2) tallies.oriented.see(triangle[first] === triangle[edges.side[from + 1]!] ? 1 : 0, face);
  }
  for (let f = 0; f < triangle.length; f += 3) {
    const [a, b, c] = [triangle[f]!, triangle[f + 1]!, triangle[f + 2]!];
    if (a !== b && b !== c && c !== a) continue;
    const place = [0, 1, 2].map((k) => position[3 * a + k]!.toPrecision(9)).join(', ');
    const message = `two corners of the triangle are the same, at (${place}) m`;
    tallies.manifold.fail(tallies.manifold.head.nameOf(f / 3), f / 3, 1, 0, message);
  }
}

function lookAtComponents(
  mesh: Welded,
  components: Components,
  boundary: BoundaryTable,
  solids: Solids,
  tallies: LumenTallies,
): void {
  const faces = mesh.triangle.length / 3;
  const first = new Int32Array(components.count).fill(-1);
  for (let f = faces - 1; f >= 0; f--) first[components.ofTriangle[f]!] = f;
  const trees = [...new Set(boundary.tree)];
  tallies.components.checked++;
  if (components.count !== trees.length) {
    const message = `${components.count} separate parts, ${trees.length} trees in boundary.csv`;
    tallies.components.fail('lumen', -1, Math.abs(components.count - trees.length), 0, message);
  }
  for (let c = 0; c < components.count; c++) {
    tallies.genus.see(Math.abs(2 - components.euler[c]!), first[c]!);
    tallies.outward.see(components.volume[c]! > 0 ? 1 : -1, first[c]!);
  }
  components.fans.forEach((fans, v) => {
    if (fans <= 1) return;
    const face = Math.floor(mesh.triangle.indexOf(v) / 3);
    const place = [0, 1, 2].map((k) => mesh.position[3 * v + k]!.toPrecision(9)).join(', ');
    const message = `${fans} separate fans of triangles meet in the corner (${place}) m`;
    tallies.manifold.fail(tallies.manifold.head.nameOf(face), face, fans - 1, 0, message);
  });
  // Every cap must lie on the part that its tree's other caps lie on.
  const partOf = new Map<string, number>();
  const done = new Set<number>();
  const rowOf = new Map(boundary.name.map((name, row) => [name, row]));
  for (let f = 0; f < faces; f++) {
    const row = rowOf.get(solids.names[solids.solid[f]!]!);
    if (row === undefined || done.has(row)) continue;
    done.add(row);
    const part = components.ofTriangle[f]!;
    const known = partOf.get(boundary.tree[row]!);
    if (known === undefined) partOf.set(boundary.tree[row]!, part);
    else if (known !== part) {
      const message = `the cap lies on another part than the other caps of tree ${boundary.tree[row]}`;
      tallies.components.fail(boundary.name[row]!, f, 1, 0, message);
    }
  }
}

/** m² of all triangles. */
function areaOf({ triangle, position }: Welded): number {
  let sum = 0;
  for (let f = 0; f < triangle.length; f += 3) {
    const [a, b, c] = [3 * triangle[f]!, 3 * triangle[f + 1]!, 3 * triangle[f + 2]!];
    const [ux, uy, uz] = [0, 1, 2].map((k) => position[b + k]! - position[a + k]!) as [number, number, number];
    const [vx, vy, vz] = [0, 1, 2].map((k) => position[c + k]! - position[a + k]!) as [number, number, number];
    sum += 0.5 * Math.hypot(uy * vz - uz * vy, uz * vx - ux * vz, ux * vy - uy * vx);
  }
  return sum;
}

/** Smallest angle of every triangle, rad. */
function measureAngles(mesh: Welded, tally: Tally): void {
  const { triangle, position } = mesh;
  for (let f = 0; f < triangle.length; f += 3) {
    let least = Infinity;
    for (let k = 0; k < 3; k++) {
      const a = 3 * triangle[f + k]!;
      const b = 3 * triangle[f + ((k + 1) % 3)]!;
      const c = 3 * triangle[f + ((k + 2) % 3)]!;
      const ux = position[b]! - position[a]!;
      const uy = position[b + 1]! - position[a + 1]!;
      const uz = position[b + 2]! - position[a + 2]!;
      const vx = position[c]! - position[a]!;
      const vy = position[c + 1]! - position[a + 1]!;
      const vz = position[c + 2]! - position[a + 2]!;
      const across = Math.hypot(uy * vz - uz * vy, uz * vx - ux * vz, ux * vy - uy * vx);
      least = Math.min(least, Math.atan2(across, ux * vx + uy * vy + uz * vz));
    }
    tally.see(least, f / 3);
  }
}

function lookAtNames(solids: Solids, boundary: BoundaryTable, tally: Tally): void {
  const used = new Int32Array(solids.names.length);
  for (const solid of solids.solid) used[solid]!++;
  const fail = (name: string, message: string) => tally.fail(name, -1, 1, 0, message);
  const seen = new Set<string>();
  solids.names.forEach((name, k) => {
    tally.checked++;
    if (!LEGAL_NAME.test(name)) fail(name, `"${name}" is no patch name: letters, digits and _, a letter first`);
    if (seen.has(name)) fail(name, 'the patch comes twice in lumen.stl');
    seen.add(name);
    if (used[k] === 0) fail(name, 'the patch has no triangles');
    if (name !== 'wall' && !boundary.name.includes(name)) fail(name, 'the patch is not in boundary.csv');
  });
  if (!seen.has('wall')) fail('wall', 'lumen.stl has no patch wall');
  const listed = new Set<string>();
  for (const name of boundary.name) {
    if (listed.has(name)) fail(name, 'the patch comes twice in boundary.csv');
    listed.add(name);
    if (!seen.has(name)) fail(name, 'the patch of boundary.csv is not in lumen.stl');
  }
}

import { solveConjugate } from './conjugate-gradients.ts';
import { buildSparseRows, entryAt, type SparseRows } from './sparse-rows.ts';

/** The cells of a node cut in tetrahedra, with what is known of the flow at their vertices. */
export interface NodeRegion {
  readonly vertices: number;
  /** (3 vertices), in any unit of length. */
  readonly position: Float64Array;
  /** (4 each) positive. */
  readonly cells: Int32Array;
  /** (vertices) 0 within, 1 on the wall, 2 and more on the sections at the rims, one number a section. */
  readonly kind: Uint8Array;
  /** (vertices) on sections (a² − ρ²)/4 of their tube, 0 elsewhere. */
  readonly profile: Float64Array;
  /** Whether the wall has layers. */
  readonly layered: boolean;
  /** (3 vertices) velocity on sections; 0 elsewhere. Gets that of all vertices. */
  readonly velocity: Float64Array;
}

/** Steps of each solver at most, and the residual that ends them. */
const STEPS = 200;
const PRECISE = 1e-5;
/** Of the divergence that is left, over what was there before it was taken out. */
const CLEAN = 1e-4;

/**
 * Velocities within a node that go on from those of its tubes, stand still at the wall and are free of divergence to the
 * order of the mesh.
 *
 * First a profile ψ with −∇²ψ = 1, which in tubes is (a² − ρ²)/4; then a potential q with ∇·(ψ∇q) = 0 whose flux through
 * each section is the tube's. ψ∇q is the parabola in the tubes, turns with the node and is zero at the wall. Its values at
 * the vertices are means of those round them; what that leaves of divergence is taken out by the least change, weighed
 * by 1/ψ so that it too vanishes at the wall: then ∫ φ ∇·u = 0 for the linear hat φ of every vertex within, of the wall
 * where it has layers, and of each section as a whole, which is how far a velocity that is linear in each cell can be free
 * of divergence. More hats, and there are places with fewer velocities than hats.
 *
 * @returns largest |∫ φ ∇·u| over the largest ∫ φ |∇u|, φ the hats within
 */
export function solveNodeFlow(region: NodeRegion): number {
  const system = assemble(region);
  const profile = solveProfile(region, system);
  spreadFlow(region, system, profile);
  return takeOutDivergence(region, system, profile);
}

interface System {
  readonly rows: SparseRows;
  /** (12 a cell) gradients of the corners' hat functions. */
  readonly gradient: Float64Array;
  /** (cells) */
  readonly volume: Float64Array;
  /** (12 a cell… 16) place in the matrix of each pair of corners. */
  readonly place: Int32Array;
  /** (vertices) a quarter of the volume of the cells round each. */
  readonly share: Float64Array;
}

function assemble({ vertices, position: p, cells }: NodeRegion): System {
  const rows = buildSparseRows(cells, vertices);
  const count = cells.length / 4;
  const gradient = new Float64Array(12 * count);
  const volume = new Float64Array(count);
  const place = new Int32Array(16 * count);
  const share = new Float64Array(vertices);
  for (let t = 0; t < count; t++) {
    const o = 3 * cells[4 * t]!;
    const a = 3 * cells[4 * t + 1]!;
    const b = 3 * cells[4 * t + 2]!;
    const c = 3 * cells[4 * t + 3]!;
    const ux = p[a]! - p[o]!;
    const uy = p[a + 1]! - p[o + 1]!;
    const uz = p[a + 2]! - p[o + 2]!;
    const vx = p[b]! - p[o]!;
    const vy = p[b + 1]! - p[o + 1]!;
    const vz = p[b + 2]! - p[o + 2]!;
    const wx = p[c]! - p[o]!;
    const wy = p[c + 1]! - p[o + 1]!;
    const wz = p[c + 2]! - p[o + 2]!;
    const six = (uy * vz - uz * vy) * wx + (uz * vx - ux * vz) * wy + (ux * vy - uy * vx) * wz;
    const g = 12 * t;
    gradient[g + 3] = (vy * wz - vz * wy) / six;
    gradient[g + 4] = (vz * wx - vx * wz) / six;
    gradient[g + 5] = (vx * wy - vy * wx) / six;
    gradient[g + 6] = (wy * uz - wz * uy) / six;
    gradient[g + 7] = (wz * ux - wx * uz) / six;
    gradient[g + 8] = (wx * uy - wy * ux) / six;
    gradient[g + 9] = (uy * vz - uz * vy) / six;
    gradient[g + 10] = (uz * vx - ux * vz) / six;
    gradient[g + 11] = (ux * vy - uy * vx) / six;
    for (let k = 0; k < 3; k++) gradient[g + k] = -gradient[g + 3 + k]! - gradient[g + 6 + k]! - gradient[g + 9 + k]!;
    volume[t] = six / 6;
    for (let i = 0; i < 4; i++) {
      share[cells[4 * t + i]!]! += six / 24;
      for (let j = 0; j < 4; j++) place[16 * t + 4 * i + j] = entryAt(rows, cells[4 * t + i]!, cells[4 * t + j]!);
    }
  }
  return { rows, gradient, volume, place, share };
}

/** Entries of ∫ weight ∇φᵢ·∇φⱼ, the weight one number a cell. */
function stiffness({ rows, gradient, volume, place }: System, weight: (cell: number) => number): Float64Array {
  const out = new Float64Array(rows.column.length);
  for (let t = 0; t < volume.length; t++) {
    const w = weight(t) * volume[t]!;
    for (let i = 0; i < 4; i++) {
      const x = gradient[12 * t + 3 * i]!;
      const y = gradient[12 * t + 3 * i + 1]!;
      const z = gradient[12 * t + 3 * i + 2]!;
      for (let j = 0; j < 4; j++) {
        const g = 12 * t + 3 * j;
        out[place[16 * t + 4 * i + j]!]! += w * (x * gradient[g]! + y * gradient[g + 1]! + z * gradient[g + 2]!);
      }
    }
  }
  return out;
}

function multiply({ start, column, count }: SparseRows, entry: Float64Array, x: Float64Array, out: Float64Array): void {
  for (let v = 0; v < count; v++) {
    let sum = 0;
    for (let i = start[v]!; i < start[v + 1]!; i++) sum += entry[i]! * x[column[i]!]!;
    out[v] = sum;
  }
}

function solveProfile({ vertices, kind, profile }: NodeRegion, system: System): Float64Array {
  const { rows, share } = system;
  const entry = stiffness(system, () => 1);
  const scale = new Float64Array(vertices);
  for (let v = 0; v < vertices; v++) scale[v] = kind[v] === 0 ? 1 / entry[rows.diagonal[v]!]! : 0;
  const out = Float64Array.from(profile);
  // Known values stand in x from the start; steps leave them.
  solveConjugate((x, image) => multiply(rows, entry, x, image), scale, share, out, PRECISE, STEPS);
  let most = 0;
  for (const value of out) most = Math.max(most, value);
  for (let v = 0; v < vertices; v++) if (kind[v] !== 1) out[v] = Math.max(out[v]!, 1e-6 * most);
  return out;
}

function spreadFlow(region: NodeRegion, system: System, profile: Float64Array): void {
  const { vertices, cells, kind, velocity } = region;
  const { rows, gradient, volume, share } = system;
  const mean = (t: number): number =>
    0.25 *
    (profile[cells[4 * t]!]! + profile[cells[4 * t + 1]!]! + profile[cells[4 * t + 2]!]! + profile[cells[4 * t + 3]!]!);
  const entry = stiffness(system, mean);
  const load = sectionLoad(region);
  const scale = new Float64Array(vertices);
  for (let v = 0; v < vertices; v++) scale[v] = 1 / entry[rows.diagonal[v]!]!;
  const potential = new Float64Array(vertices);
  solveConjugate((x, image) => multiply(rows, entry, x, image), scale, load, potential, PRECISE, STEPS);
  const sum = new Float64Array(3 * vertices);
  for (let t = 0; t < volume.length; t++) {
    for (let k = 0; k < 3; k++) {
      let slope = 0;
      for (let i = 0; i < 4; i++) slope += gradient[12 * t + 3 * i + k]! * potential[cells[4 * t + i]!]!;
      for (let i = 0; i < 4; i++) sum[3 * cells[4 * t + i]! + k]! += 0.25 * volume[t]! * slope;
    }
  }
  for (let v = 0; v < vertices; v++) {
    if (kind[v] !== 0) continue;
    for (let k = 0; k < 3; k++) velocity[3 * v + k] = (profile[v]! * sum[3 * v + k]!) / share[v]!;
  }
}

/** ∫ φ u·n over the sections, n out of the node: their outer faces are those that one cell alone has. */
function sectionLoad({ vertices, position: p, cells, kind, velocity }: NodeRegion): Float64Array {
  const out = new Float64Array(vertices);
  const seen = new Map<string, number>();
  const faces: number[] = [];
  for (let at = 0; at < cells.length; at += 4) {
    for (const [i, j, k] of OUTWARDS) {
      const [a, b, c] = [cells[at + i]!, cells[at + j]!, cells[at + k]!];
      // Corners of a section are on its rim or within it.
      if (kind[a] === 0 || kind[b] === 0 || kind[c] === 0) continue;
      if (kind[a] === 1 && kind[b] === 1 && kind[c] === 1) continue;
      const name = [a, b, c].sort((x, y) => x - y).join();
      const other = seen.get(name);
      if (other === undefined) seen.set(name, faces.push(a, b, c) - 3);
      else faces[other] = -1;
    }
  }
  for (let f = 0; f < faces.length; f += 3) {
    if (faces[f]! < 0) continue;
    const [a, b, c] = [3 * faces[f]!, 3 * faces[f + 1]!, 3 * faces[f + 2]!];
    const ux = p[b]! - p[a]!;
    const uy = p[b + 1]! - p[a + 1]!;
    const uz = p[b + 2]! - p[a + 2]!;
    const vx = p[c]! - p[a]!;
    const vy = p[c + 1]! - p[a + 1]!;
    const vz = p[c + 2]! - p[a + 2]!;
    const [nx, ny, nz] = [uy * vz - uz * vy, uz * vx - ux * vz, ux * vy - uy * vx];
    const through = (v: number): number => nx * velocity[v]! + ny * velocity[v + 1]! + nz * velocity[v + 2]!;
    const [fa, fb, fc] = [through(a), through(b), through(c)];
    // Half the cross product is the area; ∫ φᵢφⱼ is a twelfth of it, a sixth where i = j.
    out[a / 3]! += (2 * fa + fb + fc) / 24;
    out[b / 3]! += (fa + 2 * fb + fc) / 24;
    out[c / 3]! += (fa + fb + 2 * fc) / 24;
  }
  return out;
}

const OUTWARDS = [
  [1, 2, 3],
  [0, 3, 2],
  [0, 1, 3],
  [0, 2, 1],
] as const;

/** (vertices) how readily each velocity changes: the profile, but no less than a part of what it is near by. */
function mobilityOf({ vertices, kind }: NodeRegion, { rows, share }: System, profile: Float64Array): Float64Array {
  const { start, column } = rows;
  let floor = Float64Array.from(profile);
  for (let round = 0; round < 4; round++) {
    const wider = Float64Array.from(floor);
    for (let v = 0; v < vertices; v++) {
      for (let i = start[v]!; i < start[v + 1]!; i++) wider[v] = Math.max(wider[v]!, 0.3 * floor[column[i]!]!);
    }
    floor = wider;
  }
  let widest = 0;
  for (const value of profile) widest = Math.max(widest, value);
  for (let v = 0; v < vertices; v++) floor[v] = kind[v] === 0 ? floor[v]! / (widest * share[v]!) : 0;
  return floor;
}

function takeOutDivergence(region: NodeRegion, system: System, profile: Float64Array): number {
  const { vertices, kind, velocity } = region;
  const entry = hatDivergence(system);
  const { start, column } = system.rows;
  const mobility = mobilityOf(region, system, profile);
  // Hat that each vertex counts for; sections have one together, after the vertices' own.
  let sections = 0;
  const hat = new Int32Array(vertices);
  for (let v = 0; v < vertices; v++) {
    hat[v] = kind[v]! < 2 ? v : vertices + kind[v]! - 2;
    if (kind[v]! >= 2) sections = Math.max(sections, kind[v]! - 1);
  }
  const divergence = (u: Float64Array, out: Float64Array): void => {
    out.fill(0);
    for (let v = 0; v < vertices; v++) {
      let sum = 0;
      for (let i = start[v]!; i < start[v + 1]!; i++) {
        const w = 3 * column[i]!;
        sum += entry[3 * i]! * u[w]! + entry[3 * i + 1]! * u[w + 1]! + entry[3 * i + 2]! * u[w + 2]!;
      }
      out[hat[v]!]! += sum;
    }
  };
  const push = (x: Float64Array, out: Float64Array): void => {
    out.fill(0);
    for (let v = 0; v < vertices; v++) {
      const value = x[hat[v]!]!;
      if (value === 0) continue;
      for (let i = start[v]!; i < start[v + 1]!; i++) {
        const w = column[i]!;
        const m = mobility[w]! * value;
        out[3 * w]! += m * entry[3 * i]!;
        out[3 * w + 1]! += m * entry[3 * i + 1]!;
        out[3 * w + 2]! += m * entry[3 * i + 2]!;
      }
    }
  };
  const hats = vertices + sections;
  const moved = new Float64Array(3 * vertices);
  const left = new Float64Array(hats);
  const scale = new Float64Array(hats);
  for (let v = 0; v < vertices; v++) {
    let sum = 0;
    for (let i = start[v]!; i < start[v + 1]!; i++) {
      const at = 3 * i;
      const square = entry[at]! * entry[at]! + entry[at + 1]! * entry[at + 1]! + entry[at + 2]! * entry[at + 2]!;
      sum += mobility[column[i]!]! * square;
    }
    if (sum > 0 && (kind[v] === 0 || (kind[v] === 1 && region.layered))) scale[v] = 1 / sum;
  }
  const one = new Float64Array(hats);
  for (let s = 0; s < sections; s++) {
    one.fill(0);
    one[vertices + s] = 1;
    push(one, moved);
    divergence(moved, left);
    if (left[vertices + s]! > 0) scale[vertices + s] = 1 / left[vertices + s]!;
  }
  divergence(velocity, left);
  const pressure = new Float64Array(hats);
  const apply = (x: Float64Array, out: Float64Array): void => {
    push(x, moved);
    divergence(moved, out);
  };
  solveConjugate(apply, scale, left, pressure, CLEAN, STEPS);
  push(pressure, moved);
  for (let i = 0; i < moved.length; i++) velocity[i]! -= moved[i]!;
  divergence(velocity, left);
  let most = 0;
  for (let v = 0; v < vertices; v++) if (kind[v] === 0) most = Math.max(most, Math.abs(left[v]!));
  const steepest = steepestHat(region, system);
  return steepest > 0 ? most / steepest : 0;
}

/** (3 entries) ∫ φᵢ ∂φⱼ/∂x, y, z at the place of i, j. */
function hatDivergence({ rows, gradient, volume, place }: System): Float64Array {
  const entry = new Float64Array(3 * rows.column.length);
  for (let t = 0; t < volume.length; t++) {
    for (let i = 0; i < 4; i++) {
      for (let j = 0; j < 4; j++) {
        const at = 3 * place[16 * t + 4 * i + j]!;
        for (let k = 0; k < 3; k++) entry[at + k]! += 0.25 * volume[t]! * gradient[12 * t + 3 * j + k]!;
      }
    }
  }
  return entry;
}

/** Largest ∫ φ |∇u| of all vertices. */
function steepestHat({ vertices, cells, velocity }: NodeRegion, { gradient, volume }: System): number {
  const steep = new Float64Array(vertices);
  for (let t = 0; t < volume.length; t++) {
    let square = 0;
    for (let k = 0; k < 3; k++) {
      for (let m = 0; m < 3; m++) {
        let slope = 0;
        for (let i = 0; i < 4; i++) slope += gradient[12 * t + 3 * i + m]! * velocity[3 * cells[4 * t + i]! + k]!;
        square += slope * slope;
      }
    }
    for (let i = 0; i < 4; i++) steep[cells[4 * t + i]!]! += 0.25 * volume[t]! * Math.sqrt(square);
  }
  return steep.reduce((most, value) => Math.max(most, value), 0);
}

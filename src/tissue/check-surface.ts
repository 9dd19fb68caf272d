import { type Fault, InputError } from '../core/errors.ts';
import type { TriangleSurface } from '../core/surface.ts';
import { type Contact, selfContacts } from './self-contact.ts';
import { nestingFaults } from './shell-nesting.ts';
import { shellVolumes } from './surface-measures.ts';
import { count, point, short, triangleText } from './surface-text.ts';
import { edgeEnd, pinchedCorners, type SurfaceTopology, surfaceShells, surfaceTopology } from './surface-topology.ts';

/** What is known of a surface that passed. */
export interface CheckedSurface {
  readonly topology: SurfaceTopology;
  /** m³ (of the surface's own unit), > 0. */
  readonly volume: number;
  /** Outer shells: separate pieces of tissue. Allowed: each tree then fills only the piece its inlet is in. */
  readonly pieces: number;
  /** Shells turned inwards inside a piece: hollows. */
  readonly hollows: number;
}

/** Crossings found before the search stops. */
const MOST_CONTACTS = 100;
/** Largest coordinate, in the file's unit: a kilometre in micrometres, and no product of six of them overflows. */
const LARGEST = 1e9;
/** A triangle counts as degenerate where its height is less than this share of its longest edge. */
const FLAT = 1e-10;

/**
 * Refuses a surface that does not bound a volume.
 *
 * Wanted: every edge shared by exactly two triangles that run it in opposite ways, no corner where the surface pinches
 * itself, no triangle without area, nothing crossing or touching, normals outwards. Several pieces side by side are
 * allowed, and hollows (shells turned inwards) inside them; a piece inside a piece is not.
 *
 * @param surface as read, in the file's own unit (so that coordinates in messages are the file's)
 * @param where   named in every fault, e.g. the file
 * @throws  InputError with every fault found; codes `empty-surface`, `non-finite`, `out-of-range`, `bad-index`,
 *          `degenerate-triangle`, `open-surface`, `non-manifold`, `inconsistent-orientation`, `self-crossing`,
 *          `inside-out`, `nested-piece`
 * Cost:    O(f log f), 10⁵ triangles in about a second.
 */
export function checkSurface(surface: TriangleSurface, where: string): CheckedSurface {
  const { position, triangle } = surface;
  const stop = (faults: readonly Fault[]): void => {
    if (faults.length > 0) throw new InputError(faults);
  };
  stop(contentFaults(surface, where));
  const topology = surfaceTopology(surface);
  const flat = flatTriangles(surface);
  const faults: Fault[] = [];
  const add = (code: string, message: string): void => void faults.push({ code, where, message });
  if (flat.length > 0) {
    const corners = triangleText(surface, flat[0]!);
    add(
      'degenerate-triangle',
      `got ${count(flat.length, 'degenerate triangle')} without area, e.g. ${corners}, expected none`,
    );
  }
  const edge = (e: number): string => `${point(position, triangle[e]!)} to ${point(position, edgeEnd(triangle, e))}`;
  const { open, crowded, opposed } = topology;
  if (open.length > 0)
    add(
      'open-surface',
      `got an open surface: ${count(open.length, 'edge')} of one triangle only, e.g. ${edge(open[0]!)}, expected every edge shared by two`,
    );
  if (crowded.length > 0)
    add(
      'non-manifold',
      `got ${count(crowded.length, 'non-manifold edge')} shared by more than two triangles, e.g. ${edge(crowded[0]!)}, expected two`,
    );
  if (opposed.length > 0)
    add(
      'inconsistent-orientation',
      `got inconsistent orientation: ${count(opposed.length, 'edge')} run the same way by both triangles, e.g. ${edge(opposed[0]!)}, expected all triangles counter-clockwise seen from outside`,
    );
  if (faults.length === 0) {
    const pinched = pinchedCorners(surface, topology);
    if (pinched.length > 0)
      add(
        'non-manifold',
        `got ${count(pinched.length, 'non-manifold corner')} where the surface touches itself, e.g. ${point(position, pinched[0]!)}, expected one fan of triangles round each corner`,
      );
  }
  if (flat.length === 0) {
    const contacts = selfContacts(surface, MOST_CONTACTS);
    if (contacts.length > 0) add('self-crossing', contactText(surface, contacts));
  }
  stop(faults);
  const { shell, count: shells } = surfaceShells(topology);
  const volumes = shellVolumes(surface, shell, shells);
  const total = volumes.reduce((sum, v) => sum + v, 0);
  if (!(total > 0))
    add(
      'inside-out',
      `got a surface that is inside out: volume ${short(total)} of the file's cubed unit, expected > 0 (triangles counter-clockwise seen from outside)`,
    );
  else faults.push(...nestingFaults(surface, where, shell, volumes));
  stop(faults);
  const pieces = volumes.filter((v) => v > 0).length;
  return { topology, volume: total, pieces, hollows: shells - pieces };
}

/** What must hold before anything can be computed. */
function contentFaults({ position, triangle }: TriangleSurface, where: string): Fault[] {
  if (triangle.length === 0)
    return [{ code: 'empty-surface', where, message: 'got an empty surface, expected triangles' }];
  const faults: Fault[] = [];
  const odd = position.findIndex((value) => !Number.isFinite(value));
  if (odd >= 0) {
    const corner = Math.floor(odd / 3);
    const message = `got a coordinate that is not finite at corner ${corner}: ${point(position, corner)}, expected numbers`;
    faults.push({ code: 'non-finite', where, message });
  }
  const huge = position.findIndex((value) => Math.abs(value) > LARGEST && Number.isFinite(value));
  if (huge >= 0) {
    const corner = Math.floor(huge / 3);
    const message = `got ${point(position, corner)} for corner ${corner}, expected coordinates of at most ${LARGEST} in size`;
    faults.push({ code: 'out-of-range', where, message });
  }
  const corners = position.length / 3;
  const bad = triangle.findIndex((row) => !(row >= 0 && row < corners));
  if (bad >= 0) {
    const message = `got corner row ${triangle[bad]} in triangle ${Math.floor(bad / 3)}, expected 0 to ${corners - 1}`;
    faults.push({ code: 'bad-index', where, message });
  }
  return faults;
}

function flatTriangles({ position: p, triangle }: TriangleSurface): number[] {
  const out: number[] = [];
  for (let t = 0; t < triangle.length / 3; t++) {
    const a = 3 * triangle[3 * t]!;
    const b = 3 * triangle[3 * t + 1]!;
    const c = 3 * triangle[3 * t + 2]!;
    const ux = p[b]! - p[a]!;
    const uy = p[b + 1]! - p[a + 1]!;
    const uz = p[b + 2]! - p[a + 2]!;
    const vx = p[c]! - p[a]!;
    const vy = p[c + 1]! - p[a + 1]!;
    const vz = p[c + 2]! - p[a + 2]!;
    const wx = vx - ux;
    const wy = vy - uy;
    const wz = vz - uz;
    const longest = Math.max(ux * ux + uy * uy + uz * uz, vx * vx + vy * vy + vz * vz, wx * wx + wy * wy + wz * wz);
    const nx = uy * vz - uz * vy;
    const ny = uz * vx - ux * vz;
    const nz = ux * vy - uy * vx;
    if (!(Math.sqrt(nx * nx + ny * ny + nz * nz) > FLAT * longest)) out.push(t);
  }
  return out;
}

function contactText(surface: TriangleSurface, contacts: readonly Contact[]): string {
  const { first, second } = contacts[0]!;
  const many = contacts.length >= MOST_CONTACTS ? `at least ${contacts.length}` : `${contacts.length}`;
  const noun = contacts.length === 1 ? 'pair' : 'pairs';
  return `got a self-crossing surface: ${many} ${noun} of triangles cross or touch, e.g. ${triangleText(surface, first)} and ${triangleText(surface, second)}, expected none`;
}

import { fromSi } from '../../core/units.ts';
import type { LumenPatch } from '../../mesh/lumen.ts';
import type { LumenPiece } from '../../mesh/stream-lumen.ts';
import type { MeshUnit } from './length-unit.ts';

/** Bytes of a binary STL's head and of a triangle. */
const HEAD = 84;
const FACET = 50;
/** Patches that the attribute word can number. */
const MOST_PATCHES = 65_536;

/** A file whose first bytes are known only when all others have been taken. */
export interface LateHead {
  readonly headSize: number;
  head(): Uint8Array;
  readonly pieces: Iterable<Uint8Array>;
}

/** What the attribute word of a binary STL says: the patch's number or, where there are too many, 0 wall, 1 inlet, 2 outlet. */
export function attributeOf(patches: readonly LumenPatch[]): { words: Uint16Array; meaning: string } {
  const many = patches.length > MOST_PATCHES;
  const words = Uint16Array.from(patches, (patch, p) => (many ? { wall: 0, inlet: 1, outlet: 2 }[patch.kind] : p));
  return { words, meaning: many ? '0 wall, 1 inlet, 2 outlet' : 'patch number' };
}

/**
 * A lumen surface as binary STL, piece by piece: float32 corners, the attribute word as `attributeOf` tells.
 *
 * @param see is shown each piece as it passes
 * Source: de-facto standard of 1989, as `encodeBinaryStl`.
 */
export function streamBinaryStl(
  pieces: Iterable<LumenPiece>,
  patches: readonly LumenPatch[],
  unit: MeshUnit,
  see: (piece: LumenPiece) => void,
): LateHead {
  const scale = fromSi(1, unit);
  const { words, meaning } = attributeOf(patches);
  let count = 0;
  return {
    headSize: HEAD,
    head() {
      const bytes = new Uint8Array(HEAD);
      const text = `lumen surface, unit ${unit}, attribute word: ${meaning}`;
      for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
      new DataView(bytes.buffer).setUint32(80, count, true);
      return bytes;
    },
    pieces: (function* () {
      let bytes = new Uint8Array(0);
      for (const piece of pieces) {
        see(piece);
        const { triangles, position, triangle, patch } = piece;
        count += triangles;
        if (bytes.length < FACET * triangles) bytes = new Uint8Array(FACET * triangles);
        const view = new DataView(bytes.buffer);
        for (let t = 0; t < triangles; t++) {
          const at = FACET * t;
          const [a, b, c] = [3 * triangle[3 * t]!, 3 * triangle[3 * t + 1]!, 3 * triangle[3 * t + 2]!];
          const [ux, uy, uz] = [
            position[b]! - position[a]!,
            position[b + 1]! - position[a + 1]!,
            position[b + 2]! - position[a + 2]!,
          ];
          const [vx, vy, vz] = [
            position[c]! - position[a]!,
            position[c + 1]! - position[a + 1]!,
            position[c + 2]! - position[a + 2]!,
          ];
          const nx = uy * vz - uz * vy;
          const ny = uz * vx - ux * vz;
          const nz = ux * vy - uy * vx;
          const n = 1 / Math.sqrt(nx * nx + ny * ny + nz * nz);
          view.setFloat32(at, nx * n, true);
          view.setFloat32(at + 4, ny * n, true);
          view.setFloat32(at + 8, nz * n, true);
          for (let k = 0; k < 3; k++) {
            view.setFloat32(at + 12 + 4 * k, scale * position[a + k]!, true);
            view.setFloat32(at + 24 + 4 * k, scale * position[b + k]!, true);
            view.setFloat32(at + 36 + 4 * k, scale * position[c + k]!, true);
          }
          view.setUint16(at + 48, words[patch[t]!]!, true);
        }
        yield bytes.subarray(0, FACET * triangles);
      }
    })(),
  };
}

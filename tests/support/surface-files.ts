import type { TriangleSurface } from '../../src/core/surface.ts';

/** Plain encoders for tests only, so that decoders are not tested against the program's own writers. */

export function text(content: string): Uint8Array {
  return new TextEncoder().encode(content);
}

export function joined(...parts: readonly Uint8Array[]): Uint8Array {
  const out = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    out.set(part, at);
    at += part.length;
  }
  return out;
}

function corner({ position }: TriangleSurface, row: number): string {
  return `${position[3 * row]} ${position[3 * row + 1]} ${position[3 * row + 2]}`;
}

function rows(surface: TriangleSurface): number[][] {
  return Array.from({ length: surface.triangle.length / 3 }, (_, t) => [...surface.triangle.slice(3 * t, 3 * t + 3)]);
}

export function stlText(surface: TriangleSurface): string {
  const facets = rows(surface).map(
    (row) =>
      `  facet normal 0 0 0\n    outer loop\n${row.map((v) => `      vertex ${corner(surface, v)}\n`).join('')}    endloop\n  endfacet\n`,
  );
  return `solid made for a test\n${facets.join('')}endsolid made for a test\n`;
}

/** @param header first bytes of the 80 free ones; @param count what the file claims */
export function stlBinary(surface: TriangleSurface, header = '', count = surface.triangle.length / 3): Uint8Array {
  const triangles = surface.triangle.length / 3;
  const bytes = new Uint8Array(84 + 50 * triangles);
  bytes.set(text(header).slice(0, 80));
  const view = new DataView(bytes.buffer);
  view.setUint32(80, count, true);
  surface.triangle.forEach((row, i) => {
    for (let axis = 0; axis < 3; axis++) {
      const at = 84 + 50 * Math.floor(i / 3) + 12 + 12 * (i % 3) + 4 * axis;
      view.setFloat32(at, surface.position[3 * row + axis]!, true);
    }
  });
  return bytes;
}

export function objText(surface: TriangleSurface): string {
  const corners = Array.from({ length: surface.position.length / 3 }, (_, v) => `v ${corner(surface, v)}\n`);
  return `# made for a test\n${corners.join('')}${rows(surface)
    .map((row) => `f ${row.map((v) => v + 1).join(' ')}\n`)
    .join('')}`;
}

export function plyHeader(format: string, vertices: number, faces: number, real = 'double'): string {
  return `ply\nformat ${format} 1.0\ncomment made for a test\nelement vertex ${vertices}\nproperty ${real} x\nproperty ${real} y\nproperty ${real} z\nelement face ${faces}\nproperty list uchar int vertex_indices\nend_header\n`;
}

export function plyText(surface: TriangleSurface): string {
  const vertices = surface.position.length / 3;
  const corners = Array.from({ length: vertices }, (_, v) => `${corner(surface, v)}\n`);
  const faces = rows(surface).map((row) => `3 ${row.join(' ')}\n`);
  return plyHeader('ascii', vertices, faces.length) + corners.join('') + faces.join('');
}

export function plyBinary(surface: TriangleSurface, little: boolean): Uint8Array {
  const vertices = surface.position.length / 3;
  const faces = surface.triangle.length / 3;
  const body = new DataView(new ArrayBuffer(24 * vertices + 13 * faces));
  surface.position.forEach((value, i) => void body.setFloat64(8 * i, value, little));
  for (let t = 0; t < faces; t++) {
    const at = 24 * vertices + 13 * t;
    body.setUint8(at, 3);
    for (let k = 0; k < 3; k++) body.setInt32(at + 1 + 4 * k, surface.triangle[3 * t + k]!, little);
  }
  const format = little ? 'binary_little_endian' : 'binary_big_endian';
  return joined(text(plyHeader(format, vertices, faces)), new Uint8Array(body.buffer));
}

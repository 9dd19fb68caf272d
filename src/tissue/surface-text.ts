import type { TriangleSurface } from '../core/surface.ts';

/** How places of a surface are written in messages: coordinates in the file's unit, seven digits. */

export function triangleText({ position, triangle }: TriangleSurface, t: number): string {
  const corners = [0, 1, 2].map((k) => point(position, triangle[3 * t + k]!));
  return `triangle ${t} ${corners.join(' ')}`;
}

export function point(position: Float64Array, corner: number): string {
  return `(${[0, 1, 2].map((axis) => short(position[3 * corner + axis]!)).join(', ')})`;
}

export function short(value: number): string {
  return String(Number(value.toPrecision(7)));
}

export function count(n: number, noun: string): string {
  return `${n} ${noun}${n === 1 ? '' : 's'}`;
}

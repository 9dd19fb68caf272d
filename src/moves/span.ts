/** Length of a difference of two points, in their unit. */
export function span(dx: number, dy: number, dz: number): number {
  return Math.sqrt(dx * dx + dy * dy + dz * dz);
}

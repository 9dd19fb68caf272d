/** Triangulation of a unit disc whose rim is a regular polygon. */
export interface Disc {
  readonly around: number;
  /** (2 (v − around)) x, y of the inner vertices; vertex i ≥ around is inner vertex i − around. The rim is not listed. */
  readonly inner: Float64Array;
  /** (3f) vertices, counter-clockwise. */
  readonly triangle: Int32Array;
}

/**
 * Fills a regular polygon of `around` corners (at angles 2πj / around on the unit circle) with triangles near to
 * equilateral: rings of six corners fewer each, about one edge length apart, and a fan in the middle.
 *
 * @param around ≥ 3
 */
export function buildDisc(around: number): Disc {
  const inner: number[] = [];
  const triangle: number[] = [];
  let outerStart = 0;
  let outerCount = around;
  let vertices = around;
  while (outerCount > 8) {
    const count = outerCount - 6;
    const start = vertices;
    for (let j = 0; j < count; j++) {
      const angle = (2 * Math.PI * j) / count;
      inner.push((count / around) * Math.cos(angle), (count / around) * Math.sin(angle));
    }
    vertices += count;
    // Walk both rings at once; the next triangle takes the corner that comes first.
    let o = 0;
    let i = 0;
    while (o < outerCount || i < count) {
      const outer = outerStart + (o % outerCount);
      const own = start + (i % count);
      const outerNext = (o + 1) / outerCount;
      const ownNext = (i + 1) / count;
      if (i === count || (o < outerCount && outerNext + o / outerCount <= ownNext + i / count)) {
        triangle.push(outer, outerStart + ((o + 1) % outerCount), own);
        o++;
      } else {
        triangle.push(outer, start + ((i + 1) % count), own);
        i++;
      }
    }
    outerStart = start;
    outerCount = count;
  }
  const centre = vertices;
  inner.push(0, 0);
  for (let j = 0; j < outerCount; j++) triangle.push(outerStart + j, outerStart + ((j + 1) % outerCount), centre);
  return { around, inner: Float64Array.from(inner), triangle: Int32Array.from(triangle) };
}

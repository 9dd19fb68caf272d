import { addCore, addLayers } from './fill-tubes.ts';
import { GrowingRows } from './growing-column.ts';
import { GrowingVolume } from './growing-volume.ts';
import type { SectionDisc } from './lumen-volume.ts';
import { cutPrism, cutPyramid } from './tetrahedra-of.ts';

/** Flow of the parabola 1 − ρ² through a section of corner radius 1, taken linear over its faces; quadrilaterals cut either way. */
export function sectionFlux(disc: SectionDisc): number {
  const { around, layers, place, triangle } = disc;
  const over = (a: number, b: number, c: number): number => {
    const ux = place[2 * b]! - place[2 * a]!;
    const uy = place[2 * b + 1]! - place[2 * a + 1]!;
    const vx = place[2 * c]! - place[2 * a]!;
    const vy = place[2 * c + 1]! - place[2 * a + 1]!;
    return ((ux * vy - uy * vx) * (height(disc, a) + height(disc, b) + height(disc, c))) / 6;
  };
  let sum = 0;
  for (let l = 0; l < layers; l++) {
    const o = l * around;
    sum += around * (over(o, o + 1, o + around + 1) + over(o, o + around + 1, o + around));
  }
  for (let t = 0; t < triangle.length; t += 3) sum += over(triangle[t]!, triangle[t + 1]!, triangle[t + 2]!);
  return sum;
}

/**
 * The same between two sections, on average along the strip: its cross-section is a little wider there than at the rings.
 * Its height does not matter.
 */
export function stripFlux(disc: SectionDisc): number {
  const { around, points, place } = disc;
  const strip = new GrowingVolume(2 * points);
  const cosine = Math.cos(Math.PI / around);
  const sine = Math.sin(Math.PI / around);
  for (let v = 0; v < 2 * points; v++) {
    const x = place[2 * (v % points)]!;
    const y = place[2 * (v % points) + 1]!;
    // The upper ring is turned by half a step.
    if (v < points) strip.addPoint(x, y, 0, 0, 0);
    else strip.addPoint(cosine * x - sine * y, sine * x + cosine * y, 1, 0, 0);
  }
  const low = Int32Array.from({ length: points }, (_, v) => v);
  const high = low.map((v) => points + v);
  addLayers(strip, disc, { low, high, even: true, vessel: 0 });
  addCore(strip, disc, { low, high, even: true, vessel: 0 });
  const cells = new GrowingRows(4096);
  const start = cells.take(strip.tetrahedron.count);
  cells.values.set(strip.tetrahedron.trimmed(), start);
  for (let at = 0; at < strip.pyramid.count; at += 5) cutPyramid(strip.pyramid.values, at, cells);
  for (let at = 0; at < strip.prism.count; at += 6) cutPrism(strip.prism.values, at, cells);
  const p = strip.position.values;
  let sum = 0;
  for (let at = 0; at < cells.count; at += 4) {
    const [o, a, b, c] = [0, 1, 2, 3].map((k) => cells.values[at + k]!) as [number, number, number, number];
    const edge = (v: number, k: number): number => p[3 * v + k]! - p[3 * o + k]!;
    const six =
      (edge(a, 1) * edge(b, 2) - edge(a, 2) * edge(b, 1)) * edge(c, 0) +
      (edge(a, 2) * edge(b, 0) - edge(a, 0) * edge(b, 2)) * edge(c, 1) +
      (edge(a, 0) * edge(b, 1) - edge(a, 1) * edge(b, 0)) * edge(c, 2);
    for (const v of [o, a, b, c]) sum += (six * height(disc, v % points)) / 24;
  }
  return sum;
}

function height({ place }: SectionDisc, v: number): number {
  return 1 - place[2 * v]! * place[2 * v]! - place[2 * v + 1]! * place[2 * v + 1]!;
}

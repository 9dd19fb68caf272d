import { buildDisc } from '../mesh/disc.ts';
import type { SectionDisc } from './lumen-volume.ts';

/** Thickness of the innermost layer over the length of a rim edge, and of all layers over the radius at most. */
const INNERMOST = 0.38;
const THICKEST = 0.3;

/**
 * The cross-section of every tube: rings of quadrilaterals along the wall, the cap's triangles within.
 *
 * @param layers ≥ 0
 * @param growth thickness of a layer over that of the next one towards the wall, ≥ 1
 */
export function buildSectionDisc(around: number, layers: number, growth: number): SectionDisc {
  const core = buildDisc(around);
  const fraction = layerFractions(around, layers, growth);
  const inner = core.inner.length / 2;
  const points = (layers + 1) * around + inner;
  const place = new Float64Array(2 * points);
  for (let l = 0; l <= layers; l++) {
    for (let j = 0; j < around; j++) {
      const angle = (2 * Math.PI * j) / around;
      place[2 * (l * around + j)] = fraction[l]! * Math.cos(angle);
      place[2 * (l * around + j) + 1] = fraction[l]! * Math.sin(angle);
    }
  }
  const last = layers * around;
  for (let i = 0; i < 2 * inner; i++) place[2 * (last + around) + i] = fraction[layers]! * core.inner[i]!;
  // The core's own corners follow one another as the last ring and what lies within it do.
  return { around, layers, fraction, points, place, triangle: core.triangle.map((v) => v + last) };
}

/** (layers + 1) radii of the layers' rings over the rim's, from 1 inwards. */
export function layerFractions(around: number, layers: number, growth: number): Float64Array {
  const out = new Float64Array(layers + 1).fill(1);
  if (layers === 0) return out;
  let sum = 0;
  for (let l = 0, t = 1; l < layers; l++, t *= growth) sum += t;
  let innermost = 1;
  for (let l = 1; l < layers; l++) innermost *= growth;
  const edge = 2 * Math.sin(Math.PI / around);
  const first = Math.min((INNERMOST * edge) / innermost, THICKEST / sum);
  let depth = 0;
  for (let l = 1, t = first; l <= layers; l++, t *= growth) {
    depth += t;
    out[l] = 1 - depth;
  }
  return out;
}

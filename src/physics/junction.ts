import { InvariantError } from '../core/errors.ts';

/*
 * The junction law r₀^γ = Σ rᵢ^γ and what follows from it. γ = 3 is the cube law (C. D. Murray 1926), γ = 2 keeps the
 * area of the section.
 */

/**
 * x^γ by multiplication or exp and log, which give the same bytes on every engine (a built-in power does not).
 *
 * @param base     > 0
 * @param exponent any; whole numbers 2, 3 and 4 are exact products
 */
export function powerOf(base: number, exponent: number): number {
  if (exponent === 3) return base * base * base;
  if (exponent === 2) return base * base;
  if (exponent === 4) return base * base * (base * base);
  return Math.exp(exponent * Math.log(base));
}

/** The x > 0 with x^γ = power. */
export function rootOf(power: number, exponent: number): number {
  if (exponent === 3) return Math.cbrt(power);
  if (exponent === 2) return Math.sqrt(power);
  if (exponent === 4) return Math.sqrt(Math.sqrt(power));
  return Math.exp(Math.log(power) / exponent);
}

/**
 * Radius of the parent of two vessels.
 *
 * @param first    m, > 0
 * @param second   m, > 0
 * @param exponent γ > 0
 * @returns        m
 */
export function parentRadius(first: number, second: number, exponent: number): number {
  if (!(first > 0 && second > 0 && exponent > 0)) {
    throw new InvariantError(
      `parentRadius: got radii ${first}, ${second} m and exponent ${exponent}, expected all > 0`,
    );
  }
  // Relative to the larger, so that a power of a radius in metres cannot underflow.
  const large = Math.max(first, second);
  const ratio = Math.min(first, second) / large;
  return large * rootOf(1 + powerOf(ratio, exponent), exponent);
}

/**
 * Radii of two children over their parent's.
 *
 * @param ratio    first child's radius over the second's, > 0
 * @param exponent γ > 0
 * @param out      (≥ 2) receives first/parent, second/parent
 * Source: W. Schreiner and P. Buxbaum (1993), IEEE TBME 40:482; from memory, re-derived.
 * Cost:   O(1), allocates nothing.
 */
export function childRadii(ratio: number, exponent: number, out: Float64Array): void {
  if (ratio >= 1) {
    const first = 1 / rootOf(1 + powerOf(1 / ratio, exponent), exponent);
    out[0] = first;
    out[1] = first / ratio;
  } else {
    const second = 1 / rootOf(1 + powerOf(ratio, exponent), exponent);
    out[0] = second * ratio;
    out[1] = second;
  }
}

/** Two equal children over their parent. */
export interface SymmetricRatios {
  /** Child radius over parent's. */
  readonly radius: number;
  /** Area of both children over the parent's. */
  readonly area: number;
  /** Parent's resistance per length over that of both children side by side. */
  readonly resistance: number;
  /** Child's wall shear over the parent's. */
  readonly shear: number;
}

/**
 * Ratios at a junction of two equal children.
 *
 * @param exponent γ > 0
 */
export function symmetricRatios(exponent: number): SymmetricRatios {
  const radius = rootOf(0.5, exponent);
  const square = radius * radius;
  return {
    radius,
    area: 2 * square,
    resistance: 2 * square * square,
    shear: 1 / (2 * square * radius),
  };
}

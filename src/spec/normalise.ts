import type { Triple } from './types.ts';

// A direction or a list of shares that has been normalised once sums to 1 within a few units in the last place. It is then
// left alone, so that a spec read back from its own text is the same to the last bit.
const NEAR_ONE = 4e-15;

/**
 * Unit vector along a direction.
 *
 * @param direction any finite non-zero vector
 */
export function normaliseDirection(direction: Triple): Triple {
  // Scaled first, so that squares neither overflow nor vanish.
  const largest = Math.max(Math.abs(direction[0]), Math.abs(direction[1]), Math.abs(direction[2]));
  const square = direction[0] * direction[0] + direction[1] * direction[1] + direction[2] * direction[2];
  if (Math.abs(square - 1) <= NEAR_ONE) return [direction[0] + 0, direction[1] + 0, direction[2] + 0];
  const x = direction[0] / largest;
  const y = direction[1] / largest;
  const z = direction[2] / largest;
  const length = Math.sqrt(x * x + y * y + z * z);
  return [x / length + 0, y / length + 0, z / length + 0];
}

/**
 * Shares scaled to sum 1.
 *
 * @param shares each finite and > 0
 */
export function normaliseShares(shares: readonly number[]): number[] {
  if (areNormalised(shares)) return [...shares];
  const sum = compensatedSum(shares);
  return shares.map((share) => share / sum);
}

/** True if shares sum to 1 already, as they do once normalised. */
export function areNormalised(shares: readonly number[]): boolean {
  return Math.abs(compensatedSum(shares) - 1) <= NEAR_ONE;
}

/** Equal shares that sum to 1. */
export function equalShares(count: number): number[] {
  return new Array<number>(count).fill(1 / count);
}

/** Sum whose error does not grow with the number of terms. Source: Neumaier (1974); from memory. */
export function compensatedSum(terms: readonly number[]): number {
  let sum = 0;
  let lost = 0;
  for (const term of terms) {
    const next = sum + term;
    lost += Math.abs(sum) >= Math.abs(term) ? sum - next + term : term - next + sum;
    sum = next;
  }
  return sum + lost;
}

import seedrandom from 'seedrandom';

/** Draws of one named stream; every stage owns its own, so that a new draw in one moves no other. */
export interface Random {
  /** @returns uniform in [0, 1) */
  next(): number;
}

/**
 * A stream of random numbers that depends on the seed and the stream's name alone.
 *
 * @param seed   the spec's seed, any text
 * @param stream the stage's name, e.g. `sites`
 * Source: Alea generator as shipped by seedrandom; the same on every engine (integer and dyadic arithmetic only).
 */
export function randomStream(seed: string, stream: string): Random {
  const draw = seedrandom.alea(`${stream}\u0000${seed}`);
  return { next: () => draw() };
}

import seedrandom from 'seedrandom';

/** Draws of one named stream; every stage owns its own, so that a new draw in one moves no other. */
export interface Random {
  /** @returns uniform in [0, 1) */
  next(): number;
  /** Four numbers from which `resume` goes on. */
  state(): number[];
  /** Goes on as the stream whose state this was. */
  resume(state: ArrayLike<number>): void;
}

/**
 * A stream of random numbers that depends on the seed and the stream's name alone.
 *
 * @param seed   the spec's seed, any text
 * @param stream the stage's name, e.g. `sites`
 * Source: Alea generator as shipped by seedrandom; the same on every engine (integer and dyadic arithmetic only).
 */
export function randomStream(seed: string, stream: string): Random {
  let draw = seedrandom.alea(`${stream}\u0000${seed}`, { state: true });
  return {
    next: () => draw(),
    state() {
      const { c, s0, s1, s2 } = draw.state();
      return [c, s0, s1, s2];
    },
    resume(state) {
      draw = seedrandom.alea('', { state: { c: state[0]!, s0: state[1]!, s1: state[2]!, s2: state[3]! } });
    },
  };
}

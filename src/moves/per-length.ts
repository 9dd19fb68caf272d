import { flowWeight } from '../physics/murray.ts';

/** What a length of tube costs that carries a load (shares of its tree), in one unit for all tubes; rises with the load. */
export type PerLength = (load: number, tree: number) => number;

/** Of least-power tubes, and of all whose radius goes with the cube root of the flow. */
export const leastPowerPerLength: PerLength = (load) => flowWeight(load);

/** The one place where the viewer touches the library; every other file here imports from this one. */
export type { FlowField, TreeRecord } from '../src/index.ts';
export { decodeTree, fromSi, toSi, tubeLength, vesselName } from '../src/index.ts';

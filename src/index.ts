export { type ClaimedCost, checkTree } from './check/check-tree.ts';
export { checkLumen, type LumenFiles } from './check/lumen/check-lumen.ts';
export type { CheckResult, Finding, PromiseResult } from './check/result.ts';
export { checkTable } from './check/table.ts';
export { compareTrees } from './compare/compare-trees.ts';
export type { Comparison } from './compare/comparison.ts';
export { compareJson } from './compare/json.ts';
export { compareJUnit } from './compare/junit.ts';
export { compareTable } from './compare/table.ts';
export { DEFAULT_TOLERANCE, parseTolerance, type Tolerance } from './compare/tolerance.ts';
export { type Fault, InputError, InvariantError, inputError } from './core/errors.ts';
export { type Memory, ownMemory } from './core/memory.ts';
export type { Progress, Watch } from './core/progress.ts';
export { StateIn, StateOut } from './core/state.ts';
export type { TriangleSurface } from './core/surface.ts';
export { fromSi, toSi, UNITS, type Unit } from './core/units.ts';
export { LENGTH_CHOICES, type LengthChoice } from './flow/shortened-field.ts';
export { decodeTree } from './formats/decode-tree.ts';
export type { ByteSource, DecodedTree, NamedBytes, TreeFormat } from './formats/format.ts';
export { MESH_UNITS, type MeshUnit } from './formats/mesh/length-unit.ts';
export { lumenFile, MESH_FORMATS } from './formats/mesh/mesh-formats.ts';
export type { LateHead } from './formats/mesh/stl-stream.ts';
export type { VolumeNotes } from './formats/mesh/volume-files.ts';
export { CASE_FILES, CASE_FOLDER } from './formats/solver/openfoam-case.ts';
export { encodeState, openState, type StateHead } from './formats/state-file.ts';
export { decodeSurface } from './formats/surface/surface-formats.ts';
export { splitTreePath, TREE_FORMATS } from './formats/tree-formats.ts';
export type { OnMoment } from './growth/options.ts';
export { INLET_PROFILES, type InletProfile } from './mesh/inlet-profile.ts';
export type { LumenMesh } from './mesh/lumen.ts';
export { AROUND_RANGE, LUMEN_DEFAULTS } from './mesh/lumen-plan.ts';
export {
  addNegative,
  type MeshOptions,
  type MeshResult,
  meshTree,
  type NegativeResult,
  SOLVER_FILES,
  type SolverFiles,
  type SurfaceStream,
  streamSurface,
} from './mesh-run.ts';
export { CHUNK, type Crew, type ProposalTask } from './moves/crew.ts';
export { Desk } from './moves/desk.ts';
export { CAUTION } from './report/caution.ts';
export { renderReport } from './report/render.ts';
export type { Report } from './report/report.ts';
export { withResources } from './report/resources.ts';
export {
  checkRun,
  describeChanges,
  type FlowChange,
  type FlowResult,
  solveAgain,
} from './rerun.ts';
export { type GrowOptions, type GrowResult, growRun, solveRecord, VERSION } from './run.ts';
export { promiseLines, type ReportedRun, reportRun } from './run-report.ts';
export { specSchema } from './spec/json-schema.ts';
export { parseSpec, specFromValue } from './spec/parse.ts';
export { shapeFiles } from './spec/shape-files.ts';
export { specTable } from './spec/table.ts';
export type { Spec } from './spec/types.ts';
export { specToJson } from './spec/write.ts';
export { buildTissue } from './tissue/build-tissue.ts';
export type { Tissue } from './tissue/tissue.ts';
export type { FlowField, Forest, TreeKind, TreeRecord } from './tree/forest.ts';
export { countVessels, rowOfVessel, tubeLength, vesselName, vesselOfRow } from './tree/vessels.ts';
export { VOLUME_DEFAULTS } from './volume/build-volume.ts';

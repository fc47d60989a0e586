/**
 * leadspan: from a measured record, is the irregularity a rule or noise, how far ahead can a forecast be
 * trusted, and what limits it.
 */
export type { RecordReconstruction } from './assess/single.ts';
export type { Assessment, AssessmentData, AssessOptions, Mechanism, Provenance } from './assess/types.ts';
export { ASSESSMENT_SCHEMA } from './assess/types.ts';
export type { Answer, Caution, Finding, MessageParameters, Refusal, RefusalCode } from './base/answer.ts';
export { REFUSAL_CODES } from './base/answer.ts';
export { type ErrorCode, isLeadspanError, LeadspanError } from './base/errors.ts';
export type { BackendName } from './base/kernels.ts';
export type { CancelSignal, JobOptions, Progress } from './base/options.ts';
export { VERSION } from './base/version.ts';
export type { OpenOptions, WasmSource } from './core/open.ts';
export type { DivergenceCurve, DivergenceOptions, DivergenceResult } from './divergence/types.ts';
export { createEngine, type Engine, type EngineInfo, type EngineOptions } from './engine/engine.ts';
export type { WebWorkerLike } from './engine/spawn.ts';
export type { NullTestOptions, NullTestResult, Reason, Regime, RegimeCall } from './evidence/types.ts';
export type {
  ForecastOptions,
  ForecastResult,
  LeadPoint,
  LeadTimeLimit,
  LeadTimeOptions,
  LeadTimeResult,
} from './forecast/types.ts';
export type { DimensionCurve, DimensionOptions, DimensionResult, NoiseResult } from './geometry/types.ts';
export { referenceModel, referenceModelNames } from './model/reference.ts';
export { simulate } from './model/simulate.ts';
export type {
  FunctionModel,
  Model,
  ModelSpectrum,
  ModelSpectrumOptions,
  Parameters,
  ReferenceModel,
} from './model/types.ts';
export type { Reconstruction, ReconstructionCurves, ReconstructOptions } from './reconstruct/types.ts';
export type {
  PreparedRecord,
  Recording,
  RecordingOptions,
  RecordQuality,
  RecordSummary,
  Samples,
  Segment,
  Stationarity,
} from './recording/types.ts';

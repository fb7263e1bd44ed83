/**
 * The library: everything the program does, without files, streams or clock. Grouped by stage.
 */

// errors and units
export {
  DataError,
  NumericalError,
  UsageError,
  WanderlawError,
  type ErrorFacts,
  type Warning,
} from './errors.js';
export { formatUnit, NO_UNITS, QUANTITY_POWERS, type Quantity, type Units } from './units.js';

// documents
export type { DocumentPlace } from './documents/checkDocument.js';
export { type FitDocument, type FitOfAnyOrigin, type FitOrigin, fitSchema } from './documents/FitDocument.js';
export { describeDocuments, type DocumentName } from './documents/jsonSchemas.js';
export { parseFit } from './documents/parseFit.js';
export { completeStudy, parseStudyInput } from './documents/parseStudy.js';
export { type Scenario, type ScenarioInput, scenarioSchema, standingSchema } from './documents/Scenario.js';
export { type Study, type StudyInput, studySchema } from './documents/Study.js';

// tracks
export { formatTrackTable } from './import/formatTracks.js';
export {
  importTracks,
  type ImportCounts,
  type ImportOptions,
  type ImportResult,
  type TrackSource,
} from './import/importTracks.js';
export { countPositions, countTracks, type TrackSet } from './tracks/TrackSet.js';
export { checkTrackLengths, selectTracks, type UsableTracks } from './tracks/usableTracks.js';

// survey and momenta
export type { Survey } from './momenta/Survey.js';
export type { Quantiles } from './momenta/describeRecording.js';
export type { PrecisionBound } from './momenta/precisionBound.js';
export { surveyTracks, type SurveyOptions } from './momenta/surveyTracks.js';

// fit
export { fitTracks, type FitContext, type FitResult } from './fit.js';

// coefficients
export type { BasisSpec } from './fields/Basis.js';
export type {
  CoefficientField,
  FieldForm,
  FieldLink,
  FieldName,
  Model,
  ModelEvaluator,
} from './fields/CoefficientField.js';
export { createModelEvaluator } from './fields/evaluateModel.js';
export { evaluateFit, type EvaluatedColumn } from './uncertainty/evaluateFit.js';

// statements about coefficients, and about the model itself
export { type Formula, type FormulaNames, type FormulaReader, loadFormulaReader } from './fields/formula.js';
export type { ChallengeResult, Check, Effect } from './hypotheses/challenge/ChallengeResult.js';
export { challengeModel } from './hypotheses/challenge/challengeModel.js';
export type { Law } from './hypotheses/lawStatement.js';
export { type NamedLaw, NAMED_LAWS } from './hypotheses/namedLaws.js';
export { type LawContext, resolveLaws } from './hypotheses/resolveLaw.js';
export { testHypothesis, type TestRequest } from './hypotheses/testHypothesis.js';
export type { PlaceRow } from './hypotheses/tabulatePlaces.js';
export {
  type ComparedLaw,
  HYPOTHESES,
  type HypothesisName,
  type TestedLevel,
  type TestMethod,
  type TestedParameter,
  type TestResult,
} from './hypotheses/TestResult.js';

// simulation and checks
export { mapTasksSerially, type MapTasks, type Task } from './numerics/MapTasks.js';
export type { ReportShare } from './numerics/ReportShare.js';
export { RandomStream, randomStream } from './numerics/random/RandomStream.js';
export { createRecorder } from './checks/createRecorder.js';
export { createRefit } from './checks/createRefit.js';
export type { Region } from './checks/Region.js';
export { resimulate, type ResimulationOptions } from './checks/resimulate.js';
export type {
  RefitCoefficient,
  ResimulationResult,
  ResimulationSeries,
  ResimulationSeriesKind,
  ResimulationStatistic,
  ResimulationTime,
} from './checks/ResimulationResult.js';
export type { Standing } from './documents/Scenario.js';
export { assessStanding } from './simulation/assessStanding.js';
export { buildFirstOrderScenario, type NeglectedTerms } from './simulation/buildFirstOrderScenario.js';
export { buildScenario } from './simulation/buildScenario.js';
export type { StepControl } from './simulation/controlStep.js';
export { createScenario, parseScenario } from './simulation/parseScenario.js';
export {
  simulateScenario,
  type SimulationOptions,
  type SimulationResult,
} from './simulation/simulateScenario.js';

// report
export type { Chart, Probe } from './report/charts/Drawing.js';
export type { Figure, FigureTable } from './report/figure.js';
export { composeFigure } from './report/figureFile.js';
export type { LegendPart, Sample, SampleEntry, StripEntry } from './report/legend.js';
export { type DrawnReport, drawReport, renderReport } from './report/renderReport.js';
export type {
  ReportedChallenge,
  ReportedLaw,
  ReportedParameters,
  ReportedTest,
  ReportInput,
} from './report/ReportInput.js';
export {
  formatChallengeSummary,
  formatFitSummary,
  formatResimulationSummary,
  formatSurveySummary,
  formatTestSummary,
  type SummaryStyle,
} from './report/terminal.js';
export type { Paint } from './report/terminal/SummaryStyle.js';

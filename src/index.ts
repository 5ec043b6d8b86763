/** The public API: runs in Node and in a browser alike. The command line and the page use nothing else, but for files on disk. */
export const VERSION = '0.1.0';
export { TankhueError, TankhueErrors } from './errors.ts';
export type { Finding, Severity } from './finding.ts';
export { makeSpectrum, type Spectrum, type SpectrumOrigin } from './spectrum/spectrum.ts';
export { resample, type Resampled } from './spectrum/resample.ts';
export { readingNoise } from './spectrum/noise.ts';
export { subtractBlank, type BlankSubtracted } from './spectrum/blank.ts';
export * from './electrolyte/species.ts';
export { parseAssociation, type Association } from './electrolyte/association.ts';
export { amountsOf, newAmounts } from './electrolyte/forwardModel.ts';
export { calibrate, type CalibrationRequest } from './calibration/build.ts';
export type * from './calibration/calibration.ts';
export { parseCalibration, serialiseCalibration } from './calibration/file.ts';
export type { Standard } from './calibration/standard.ts';
export { assaySample, DEFAULT_ASSAY_OPTIONS, type CalibrationInUse } from './assay/assaySample.ts';
export type { AssayOptions, BlankState, Sample } from './assay/sample.ts';
export type * from './assay/result.ts';
export { findColumn, parseSpectra, parseSpectraChunks, withHash } from './io/spectra.ts';
export type { AxisUnit, Layout, OrdinateUnit, ReadOptions, Separator } from './io/readOptions.ts';
export { understoodText, type SpectraRead, type Understood, type UnderstoodSpectrum } from './io/understood.ts';
export {
  parseDilution,
  parseInUnits,
  parseLength,
  parseOxidationState,
  parsePositive,
  parseTemperature,
} from './io/quantityText.ts';
export { readSamplesSheet, type SamplesRow } from './io/samplesSheet.ts';
export { readStandardsSheet, type StandardsRow } from './io/standardsSheet.ts';
export { readTanksSheet, TANKS_COLUMNS, type TanksRow } from './io/tanksSheet.ts';
export { readSheet } from './io/sheet.ts';
export { assayText } from './report/assayText.ts';
export { assayCsv } from './report/assayCsv.ts';
export { calibrationText } from './report/calibrationText.ts';
export {
  prepare,
  type ManyOptions,
  type ManyResults,
  type PairsOnGrid,
  type PreparedMany,
} from './estimation/solveMany.ts';
export { seededRandom, type Random } from './numerics/random.ts';
export { drawComposition, type CompositionSource, type DrawnComposition } from './estimation/monteCarloComposition.ts';
export { simulateSpectrum, type SimulatedNoise, type SimulationRequest } from './estimation/simulate.ts';
export { NO_FAULTS, type SimulatedFaults } from './estimation/simulateFaults.ts';
export { compositionAt, parseComposition, sideHolding, type Composition } from './electrolyte/composition.ts';
export { csvLine } from './report/csv.ts';
export { spectraCsv, spectraJcamp } from './report/spectraText.ts';
export { absorbanceFromMilliabsorbance } from './units.ts';
export type * from './assay/instrumentRecord.ts';
export { uncertaintyFromPrecision } from './assay/precisionRecord.ts';
export type * from './assay/precisionRecord.ts';
export {
  verifyInstrument,
  DEFAULT_VERIFICATION,
  type VerificationOptions,
} from './bench/instrument/verifyInstrument.ts';
export type * from './bench/instrument/scans.ts';
export {
  readVerificationSheet,
  scansOfRows,
  type SpectrumLoader,
  type VerificationScans,
} from './io/verificationSheet.ts';
export { readInstrumentRecord } from './io/instrumentRecordFile.ts';
export { instrumentText } from './report/instrumentText.ts';
export { checkStandardChart, DEFAULT_CHART_DESIGN, type CheckStandardChart } from './bench/chart/checkStandardChart.ts';
export type * from './bench/chart/checkLog.ts';
export { readCheckLog } from './io/checkLogSheet.ts';
export { chartText } from './report/chartText.ts';
export { precisionStudy } from './bench/precision/precisionStudy.ts';
export { readReplicateSheet } from './io/replicateSheet.ts';
export { readPrecisionRecord } from './io/precisionRecordFile.ts';
export { precisionText } from './report/precisionText.ts';
export * from './bench/glassware.ts';
export { measurementModelOf, type MeasurementModel } from './bench/planning/measurementModel.ts';
export { photometerTraits } from './bench/planning/photometerTraits.ts';
export { DEFAULT_WISH, MARKET_PATHS, marketCell, planMeasurement } from './bench/planning/planMeasurement.ts';
export type * from './bench/planning/planMeasurement.ts';
export { measurementPlanText } from './report/measurementPlanText.ts';
export { benchReport, type Picture } from './report/benchReport.ts';
export { chartPicture } from './report/chartPicture.ts';
export { measurementMapPicture } from './report/measurementMapPicture.ts';
export { conformityPicture } from './report/conformityPicture.ts';
export { balancePlant, type BalanceDocument, type SystemBalance } from './tanks/balance.ts';
export { plantFromAssays } from './tanks/fromAssays.ts';
export type { PlantReading, TankReading } from './tanks/reading.ts';
export { balanceText } from './report/balanceText.ts';
export { balanceCsv } from './report/balanceCsv.ts';
export { mixStates, warmingOf, type MixedStates, type VanadiumAmounts } from './electrolyte/mixStates.ts';
export { titrate } from './bench/titration/titrate.ts';
export type * from './bench/titration/titrationResult.ts';
export type * from './bench/titration/titrationRun.ts';
export { simulateTitration, type SimulatedTitration } from './bench/titration/simulateCurve.ts';
export { readTitrations, TITRATION_RUN_COLUMNS, type CurveFile } from './io/titrationSheet.ts';
export { readAssayNumbers } from './io/assayFile.ts';
export { relabelStandards, type RelabelledSheet } from './io/relabelStandards.ts';
export { standardsRowsCsv } from './report/standardsRowsText.ts';
export { titrationPicture } from './report/titrationPicture.ts';
export { titrationText } from './report/titrationText.ts';
export { combineReplicates, type Replicate } from './assay/combine.ts';
export { optionsFromInstrument } from './assay/instrumentOptions.ts';
export { planStandards, type StandardsPlan } from './calibration/planStandards.ts';
export { planStandardsText } from './report/planStandardsText.ts';
export { blend, type BlendTarget, type MixingBench } from './bench/mixing/blend.ts';
export { dilutionSeries } from './bench/mixing/dilutionSeries.ts';
export { dissolve, SOLIDS, type DissolveRequest, type Solid } from './bench/mixing/dissolve.ts';
export { electrolyse, type ElectrolysisRequest } from './bench/mixing/electrolysis.ts';
export type { GlassClass } from './bench/mixing/deliver.ts';
export type * from './bench/mixing/mixResult.ts';
export type { Stock } from './bench/mixing/stock.ts';
export { NO_SPECTRUM, type StandardsSheetRow } from './bench/standardsRow.ts';
export { findStock, readStocksSheet, readTargetsSheet } from './io/stocksSheet.ts';
export { mixPicture } from './report/mixPicture.ts';
export { mixText } from './report/mixText.ts';
export { DISCLAIMER } from './tanks/cautions.ts';
export { assayReport, balanceReport, calibrationReport } from './report/makeReport.ts';
export { readBack } from './report/readBack.ts';
export { ladderText } from './report/ladderText.ts';
export { readAssayDocument, readBalanceDocument } from './io/resultFile.ts';
export {
  assayDocumentOf,
  assayRows,
  balanceDocumentOf,
  withReplicatesCombined,
  type Cuvette,
} from './io/sheetResults.ts';
export { colourThrough, type SeenColour } from './electrolyte/colour.ts';
export { colourDifference } from './electrolyte/colourDifference.ts';
export { extensionFindings, requireOldStandards } from './calibration/extend.ts';
export { transferCalibration, type Transfer } from './calibration/transfer.ts';
export { precisionForAssay } from './assay/precisionRecord.ts';

// Pure: no I/O, no clock, no hidden randomness.
// Photon pairs of one guide: spectrum, number, purity, correlations, heralding, interference.
export { type JointAmplitude, newScratch, type Scratch, type WaveNumbers } from "./amplitude.ts";
export type { Axis } from "./axis.ts";
export { carContinuous, carPulsed, type Darkness, type PairDetection } from "./car.ts";
export { LOW_GAIN_LIMIT, lowGainRemark, type PairStrength, parametricStrength } from "./counts.ts";
export { type Curve, tabulate } from "./curve.ts";
export { type DelayMaximum, maximiseOverDelay } from "./delay.ts";
export {
  type ArmOptics,
  assembleFigures,
  type PairChain,
  pairFigures,
  type PairResult,
  pairSpectrum,
  pairSpectrumDraws,
} from "./figures.ts";
export { PAIR_FIGURES, type PairFigure } from "./figure_names.ts";
export { type Filter, filterBand, transmission } from "./filters.ts";
export { type CorrelationTerms, g2Heralded, g2Unheralded, powerAtG2 } from "./g2.ts";
export { type ComplexMatrix, type GramMoments, gramMoments } from "./gram.ts";
export {
  assembleBudget,
  type Budget,
  BUDGET_FACTORS,
  type BudgetFactor,
  klyshko,
  type PairLosses,
  type PairSurvival,
  pairSurvival,
  poledStretches,
  type Stretch,
} from "./heralding.ts";
export {
  contrastVisibility,
  dipVisibility,
  exchangeOverlap,
  heraldedState,
  sourceOverlap,
  splitterFactor,
} from "./interference.ts";
export { absent, combine, given, type Outcome } from "./outcome.ts";
export { type GriddedAmplitude, jointAmplitude, newPairScratch, type PairScratch } from "./pulsed.ts";
export {
  pulse,
  type PulseShape,
  pulseWidth,
  type PumpSpectrum,
  recordedPulse,
  spectralWidth,
  type SpectrumPoint,
  TIME_BANDWIDTH,
} from "./pump.ts";
export { purity, purityOfWeights, refine, schmidtNumber, schmidtWeights } from "./schmidt.ts";
export {
  type FilterShares,
  type GridOptions,
  type PairPump,
  type PairSource,
  type PairSpectrum,
  type PreparedSource,
  prepareSource,
  type SpectrumDraws,
} from "./source.ts";
export { twoSourceDip } from "./two_sources.ts";
export { armsSeparable, type ArmWindow, armWindow, type Band, unfilteredHalfWidth } from "./window.ts";

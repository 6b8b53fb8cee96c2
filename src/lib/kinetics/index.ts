/**
 * The kinetics engine. From a scheme to a curve:
 *
 *     toNetwork(scheme) → checkNetwork(network) → rateConstants(network, conditions) → linearSystem(network, constants)
 *     → solve(system, charge) → solution.curves(timesS), .modes, .final
 */
export * from './types';
export * from './units';
export * from './from-scheme';
export { checkNetwork, type ChargeById, type CheckOptions } from './checks';
export { balancingReverse, reversibleCycles, type ReversibleCycle } from './cycles';
export * from './rate-laws';
export * from './linear-system';
export { conservedTotals, type ConservedTotal } from './conserved';
export { finalComposition, type FinalComposition } from './final-composition';
export { solve } from './solve';
export { Propagator } from './propagator';
export { expm } from './expm';
export { formulas, type FormulaOptions, type SpeciesFormula, type TimeUnit } from './formulas';
export * from './sensitivity';
export { ENGINE_VERSION } from './version';

// Beyond one constant batch, and what follows from a curve.
export * from './adequacy';
export * from './criteria';
export * from './criteria-hold';
export * from './best-residence';
export * from './dosing';
export * from './dosing-sensitivity';
export * from './extrema';
export { plugFlow, stirredTank, tanksInSeries } from './flow';
export * from './flow-sensitivity';
export * from './material';
export * from './material-sensitivity';
export * from './parameter-sensitivity';
export * from './programs';
export * from './program-sensitivity';
export * from './rate-parameters';
export * from './residence-table';
export * from './tie';

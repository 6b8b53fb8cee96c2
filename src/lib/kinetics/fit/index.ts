/** Fitting: from a request to a report. Start with `plan`, then `fit`. */
export { fit, FitCancelled, FitRequestError, type FitHooks, type FitProgress } from './fit';
export { plan, type FitPlan, type PlannedParameter } from './plan';
export {
	straightLine,
	lineAt,
	temperatureLine,
	type StraightLine,
	type TemperatureLine
} from './straight-line';
export * from './distributions';
export {
	predict,
	predictRestored,
	confirmationRun,
	type Prediction,
	type PredictedSeries,
	type Confirmation,
	type ConfirmationPoint
} from './bands';
export { restoreFit, type RestoredFit } from './restore';
export {
	compareSchemes,
	ComparisonError,
	type ComparedScheme,
	type Comparison,
	type SeparatingSample
} from './compare';
export { samplingPlan, type SamplingOptions, type SamplingPlan, type ExpectedWidth } from './sampling-plan';
export { arrheniusCheck, type ArrheniusCheck, type ConstantCheck, type LocalConstant } from './arrhenius';
export { hasLocalConstants } from './local-slots';
export { planSamplesFor } from './plan-samples';
export { jointRegion, type JointRegion } from './joint-region';
export { bootstrap, leaveOneRunOut, withExcludedValues, type Bootstrap, type RunInfluence } from './refit';
export { identifiability, type Identifiability } from './identifiability';
export { maxima, type Maximum } from './maximum';
export { criterionOutlook, REACH, type CriterionOutlook } from './decision-answer';
export {
	decisionQuantities,
	type DecisionOptions,
	type DecisionQuantity,
	type DecisionQuestion
} from './decision';
export { profileCurves, type ProfileCurve } from './profile-curve';

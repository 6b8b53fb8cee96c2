import { z } from 'zod';
import { quantity } from './quantity';
import { runContent } from './run';
import { schemeContent } from './scheme';

/**
 * Parameter ids: `<step>.forward.kRef`, `<step>.reverse.kRef`, `<step>.forward.activationEnergy`,
 * `<step>.reverse.equilibriumConstant`, `<run>.initial.<species>`, `<channel>.responseFactor`, `<run>.timeOffset`.
 *
 * A parameter named in `local` has a value of its own in each run instead: `<run>.<step>.forward.k`, `<run>.<step>.reverse.k`
 * and `<run>.<step>.reverse.K` at the run's own temperature, `<run>.<channel>.responseFactor`.
 */
export const fitOptions = z.strictObject({
	fixed: z.array(z.string()).max(200).default([]),
	tied: z
		.array(z.strictObject({ parameter: z.string(), to: z.string(), factor: z.number().default(1) }))
		.max(100)
		.default([]),
	bounds: z
		.record(z.string(), z.strictObject({ lower: quantity.optional(), upper: quantity.optional() }))
		.default({}),
	weighting: z
		.strictObject({
			model: z.enum(['constant', 'proportional', 'combined', 'replicates']),
			/** Channel's constant and proportional parts for `combined`, in the channel's unit and as a fraction. */
			a: z.number().positive().optional(),
			b: z.number().nonnegative().optional(),
			perChannel: z
				.record(z.string(), z.strictObject({ a: z.number().positive(), b: z.number().nonnegative() }))
				.optional()
		})
		.default({ model: 'constant' }),
	/** Whether an observed row at time zero counts as data; off where the charge is fixed. */
	useTimeZeroRow: z.boolean().optional(),
	starts: z.int().min(1).max(500).default(20),
	seed: z
		.int()
		.min(0)
		.max(2 ** 31 - 1)
		.default(1),
	profiles: z.boolean().default(true),
	confidenceLevel: z.number().min(0.5).max(0.999).default(0.95),
	/**
	 * Shared ids (`s1.forward.kRef`, `s1.reverse.equilibriumConstant`, `B.responseFactor`) of parameters that take a value of
	 * their own in each run. Left out: all are shared.
	 */
	local: z.array(z.string()).max(100).optional(),
	/** Left out: least squares. `determinant`: the criterion of Box & Draper for responses whose errors go together. */
	criterion: z.enum(['least squares', 'determinant']).optional(),
	/** False: parameters that enter linearly are searched for like the others. Left out: eliminated wherever that is exact. */
	variableProjection: z.boolean().optional()
});
export type FitOptions = z.infer<typeof fitOptions>;

export const fitRequest = z.strictObject({
	species: schemeContent.shape.species,
	steps: schemeContent.shape.steps,
	referenceTemperature: schemeContent.shape.referenceTemperature,
	runs: z.array(runContent).min(1).max(100),
	options: fitOptions.prefault({})
});
export type FitRequest = z.infer<typeof fitRequest>;

export interface FitFinding {
	code: string;
	level: 'stop' | 'caution' | 'note';
	message: string;
	parameters?: string[];
	runs?: string[];
}

export interface FitParameter {
	id: string;
	estimate: number;
	standardError: number | null;
	ci95: [number, number] | null;
	/** An open end is null; the whole is null where no profile was asked for. */
	profileCi95: [number | null, number | null] | null;
	unit: string;
	state: 'fitted' | 'fixed' | 'tied' | 'at bound';
	/** Standard error of the natural logarithm, for parameters that are fitted on the log scale. */
	logStandardError?: number | null;
	/** A parameter that is local to a run: the run, and the shared id that it stands in for. */
	local?: { run: string; of: string };
}

/** What the determinant criterion stands on and leaves. */
export interface DeterminantSummary {
	/** Channels taken together, in the order of `residualCovariance`. */
	responses: string[];
	/** Rows in which every response has a value; the criterion uses these alone. */
	rows: number;
	/** Rows left out because a response is missing or below a limit. */
	rowsLeftOut: number;
	/** ln |ZᵀZ| at the estimates, over the independent combinations. */
	logDeterminant: number;
	/** ln |ZᵀZ| of the least-squares estimates, to compare. */
	logDeterminantLeastSquares: number;
	/** ZᵀZ/(rows − parameters), in the channels' units. */
	residualCovariance: number[][];
	residualCorrelation: number[][];
	/** Linear dependencies among the responses (a mass balance, a value obtained by difference), taken out before. */
	dependencies: { weights: Record<string, number>; words: string }[];
	/** How many starting points reached the reported minimum, of how many. */
	starts: { reached: number; run: number };
}

/** One residual: enough to plot it, weigh it and find its cell again. */
export interface FitResidual {
	run: string;
	channel: string;
	index: number;
	time: number;
	timeUnit: string;
	observed: number | null;
	/** For a value below (above) a limit. */
	below?: number;
	above?: number;
	predicted: number;
	residual: number | null;
	/** 1/weight: the standard deviation that the error model gives, up to the common factor s. */
	sigma: number;
	studentised: number | null;
	leverage: number | null;
}

export interface FitReport {
	status: 'converged' | 'not converged' | 'failed';
	message: string;
	parameters: FitParameter[];
	/** Ids of the fitted parameters in the order of `correlation` and `covariance`. */
	fittedIds: string[];
	correlation: number[][];
	/**
	 * Covariance on the scale of estimation: ln for rate constants, equilibrium constants and response factors; as they are for
	 * energies (J/mol), amounts (mol/L) and time offsets (s). See `scales`.
	 */
	covariance: number[][];
	/** 'ln' or 'linear' per fitted parameter: the scale of `covariance`. */
	scales: ('ln' | 'linear')[];
	weightedSsr: number;
	residualStandardError: number | null;
	pointsUsed: number;
	pointsCensored: number;
	degreesOfFreedom: number;
	aicc: number | null;
	bic: number | null;
	lackOfFit: { f: number; df1: number; df2: number; p: number; critical: number } | null;
	runsTest: { z: number; p: number } | null;
	lag1: number | null;
	alternatives: {
		parameters: Record<string, number>;
		weightedSsr: number;
		starts: number;
		deltaAicc: number;
	}[];
	residuals: FitResidual[];
	singularValues: number[];
	massBalance: {
		run: string;
		percent: { time: number; value: number }[];
		slopePerHour: number | null;
		slopeCi95: [number, number] | null;
	}[];
	findings: FitFinding[];
	evaluations: number;
	optimality: number;
	startsRun: number;
	startsConverged: number;
	engineVersion: string;
	seed: number;
	/**
	 * Ids of the parameters that enter linearly and were eliminated from the search (variable projection); empty where none was.
	 * Estimates, errors and intervals are those of the full problem.
	 */
	eliminated?: string[];
	/** Why nothing, or not everything that enters linearly, was eliminated; one sentence, left out where there is nothing to say. */
	eliminationNote?: string;
	/** Left out: least squares. */
	criterion?: 'least squares' | 'determinant';
	/** With the determinant criterion. `weightedSsr` and s then describe the misfit at its estimates, not what was minimised. */
	determinant?: DeterminantSummary;
	/** Lowest and highest run temperature and charge, SI and °C, for "studied range". */
	studied: {
		temperatureC: [number, number];
		chargeMolPerL: Record<string, [number, number]>;
		lastTimeH: number;
	};
}

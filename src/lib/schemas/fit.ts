import { z } from 'zod';
import { quantity } from './quantity';
import { runContent } from './run';
import { schemeContent } from './scheme';

/**
 * Parameter ids: `<step>.forward.kRef`, `<step>.reverse.kRef`, `<step>.forward.activationEnergy`,
 * `<step>.reverse.equilibriumConstant`, `<run>.initial.<species>`, `<channel>.responseFactor`, `<run>.timeOffset`.
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
	confidenceLevel: z.number().min(0.5).max(0.999).default(0.95)
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
	/** Lowest and highest run temperature and charge, SI and °C, for "studied range". */
	studied: {
		temperatureC: [number, number];
		chargeMolPerL: Record<string, [number, number]>;
		lastTimeH: number;
	};
}

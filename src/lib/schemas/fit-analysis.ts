import { z } from 'zod';
import type {
	ArrheniusCheck,
	Bootstrap,
	Confirmation,
	DecisionQuantity,
	JointRegion,
	Prediction,
	ProfileCurve,
	RunInfluence,
	SamplingPlan
} from '../kinetics/fit';
import { criterionSchema } from './criterion';
import type { FitReport } from './fit';
import type { RunContent } from './run';

/** A quantity that somebody decides by. */
export const decisionQuestion = z.discriminatedUnion('kind', [
	z.strictObject({ kind: z.literal('maximum'), species: z.string() }),
	/** Share of the species' own charge that is gone, 0 to 1. */
	z.strictObject({
		kind: z.literal('conversion'),
		species: z.string(),
		conversion: z
			.number({ error: 'A conversion between 0 and 1 is expected.' })
			.gt(0, 'A conversion between 0 and 1 is expected.')
			.lt(1, 'A conversion between 0 and 1 is expected.')
	}),
	/** In the unit of the species' curve in that run. */
	z.strictObject({ kind: z.literal('level'), species: z.string(), level: z.number().positive() }),
	z.strictObject({ kind: z.literal('criterion'), criterion: criterionSchema }),
	/** In the run's time unit. */
	z.strictObject({
		kind: z.literal('composition'),
		time: z.number().positive('A time above zero is expected.')
	})
]);
export type AskedDecision = z.infer<typeof decisionQuestion>;

/** One of them answered. */
export interface AnsweredDecision {
	question: AskedDecision;
	/** Empty where the time does not come, or the question has no meaning for this run; `none` then says so. */
	quantities: DecisionQuantity[];
	none: string | null;
}

/** What a person can ask of a recorded fit besides its report. Every answer follows from the record alone: equal questions, equal digits. */
export const fitQuestion = z.discriminatedUnion('kind', [
	/** How far the constants move without each run in turn. */
	z.strictObject({ kind: z.literal('influence') }),
	/** The constants of each run alone, beside k(T) of the fit. */
	z.strictObject({ kind: z.literal('arrhenius') }),
	/** τ over each constant, to draw. */
	z.strictObject({ kind: z.literal('profiles') }),
	/** Where two constants may lie together. */
	z.strictObject({ kind: z.literal('region'), parameters: z.tuple([z.string(), z.string()]) }),
	/** Intervals from simulated data. */
	z.strictObject({ kind: z.literal('bootstrap'), draws: z.int().min(50).max(1000).default(200) }),
	/** The same fit with every excluded value put back. */
	z.strictObject({ kind: z.literal('excluded') }),
	/** Curves of one run with their bands, at evenly spaced times up to its last sample. */
	z.strictObject({
		kind: z.literal('curves'),
		run: z.string(),
		points: z.int().min(2).max(1000).default(160)
	}),
	/** Times and amounts that people decide by, with intervals. */
	z.strictObject({
		kind: z.literal('decisions'),
		run: z.string(),
		/** Left out: the criteria of the study, the maxima, and the composition at the last sample. */
		questions: z.array(decisionQuestion).max(20, 'At most 20 quantities at a time.').optional(),
		/** Intervals by profile likelihood as well, where the problem is small enough. */
		profiles: z.boolean().default(true)
	}),
	/** When to take the next samples of a run. */
	z.strictObject({
		kind: z.literal('sampling'),
		/** Id of the run within the request. */
		run: z.string(),
		samples: z.int('A whole number of samples is expected.').min(1).max(20),
		earliest: z.number().min(0),
		latest: z.number().positive(),
		minimumGap: z.number().min(0).default(0),
		/** Spans in which samples can be taken, in the run's time unit. */
		windows: z
			.array(z.tuple([z.number(), z.number()]))
			.max(60)
			.default([]),
		channels: z.array(z.string()).max(64).default([])
	})
]);
export type FitQuestion = z.infer<typeof fitQuestion>;
export type SamplingQuestion = Extract<FitQuestion, { kind: 'sampling' }>;

/** What is answered, by the kind of question. */
export interface FitAnswers {
	influence: RunInfluence[];
	arrhenius: ArrheniusCheck;
	profiles: ProfileCurve[];
	region: JointRegion;
	bootstrap: Pick<Bootstrap, 'intervals' | 'failed' | 'seed'> & { draws: number };
	/** Null where nothing is excluded. */
	excluded: FitReport | null;
	curves: Prediction;
	decisions: {
		run: string;
		timeUnit: RunContent['timeUnit'];
		answers: AnsweredDecision[];
		/** Whether profiles were followed; large problems have the linear approximation alone. */
		profiled: boolean;
	};
	sampling: SamplingPlan;
}

/** An unused run held against a fit: count, points with their band, and curves to draw. */
export interface ConfirmedPrediction {
	confirmation: Confirmation;
	curves: Prediction;
	/** Columns and charge as far as the scheme of the fit has them. */
	run?: RunContent;
}

import { z } from 'zod';
import type {
	Bootstrap,
	Confirmation,
	JointRegion,
	Prediction,
	ProfileCurve,
	RunInfluence,
	SamplingPlan
} from '../kinetics/fit';
import type { FitReport } from './fit';
import type { RunContent } from './run';

/** What a person can ask of a recorded fit besides its report. Every answer follows from the record alone: equal questions, equal digits. */
export const fitQuestion = z.discriminatedUnion('kind', [
	/** How far the constants move without each run in turn. */
	z.strictObject({ kind: z.literal('influence') }),
	/** τ over each constant, to draw. */
	z.strictObject({ kind: z.literal('profiles') }),
	/** Where two constants may lie together. */
	z.strictObject({ kind: z.literal('region'), parameters: z.tuple([z.string(), z.string()]) }),
	/** Intervals from simulated data. */
	z.strictObject({ kind: z.literal('bootstrap'), draws: z.int().min(50).max(1000).default(200) }),
	/** The same fit with every excluded value put back. */
	z.strictObject({ kind: z.literal('excluded') }),
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
	profiles: ProfileCurve[];
	region: JointRegion;
	bootstrap: Pick<Bootstrap, 'intervals' | 'failed' | 'seed'> & { draws: number };
	/** Null where nothing is excluded. */
	excluded: FitReport | null;
	sampling: SamplingPlan;
}

/** An unused run held against a fit: count, points with their band, and curves to draw. */
export interface ConfirmedPrediction {
	confirmation: Confirmation;
	curves: Prediction;
	/** Columns and charge as far as the scheme of the fit has them. */
	run?: RunContent;
}

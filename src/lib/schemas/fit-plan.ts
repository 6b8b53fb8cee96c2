import { z } from 'zod';
import { fitRequest } from './fit';
import { runContent } from './run';

const partA = z
	.number({ error: 'Give the constant part a.' })
	.positive('The constant part a must be above zero.');
const partB = z.number().nonnegative('The proportional part b cannot be below zero.');

/**
 * What a sampling plan before the first run stands on: the scheme with guessed constants, the conditions of the run that is
 * planned, and the error that one value is expected to have.
 */
export const samplePlanRequest = z.strictObject({
	species: fitRequest.shape.species,
	steps: fitRequest.shape.steps,
	referenceTemperature: fitRequest.shape.referenceTemperature,
	/** Conditions and channels; a charge, offset or response factor to be fitted needs its guess. */
	run: runContent
		.omit({ timepoints: true, exclusions: true, corrections: true, conversions: true, replicates: true })
		.strict(),
	/** Ids of parameters that are taken as known: the plan spends no sample on them. */
	fixed: z.array(z.string()).max(200).default([]),
	/** Expected standard deviation of one value: √(a² + (b·y)²), a in the channel's unit, b a fraction. */
	error: z.strictObject({
		a: partA,
		b: partB.default(0),
		perChannel: z.record(z.string(), z.strictObject({ a: partA, b: partB.default(0) })).optional()
	}),
	samples: z.int('A whole number of samples is expected.').min(1).max(20),
	/** In the run's time unit. */
	earliest: z.number().min(0),
	latest: z.number().positive(),
	minimumGap: z.number().min(0).default(0),
	/** Spans in which samples can be taken, in the run's time unit. */
	windows: z
		.array(z.tuple([z.number(), z.number()]))
		.max(60)
		.default([]),
	/** Channels that will be assayed; left out: all of the run's. */
	channels: z.array(z.string()).max(64).default([]),
	confidenceLevel: z.number().min(0.5).max(0.999).default(0.95)
});
export type SamplePlanRequest = z.infer<typeof samplePlanRequest>;

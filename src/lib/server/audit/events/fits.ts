import { z } from 'zod';

export const fitEvents = {
	'fit.started': z.object({
		inputHash: z.string(),
		schemeVersionId: z.string(),
		runRevisionIds: z.array(z.string()),
		options: z.unknown(),
		engineVersion: z.string(),
		seed: z.number()
	}),
	'fit.finished': z.object({
		number: z.number(),
		status: z.string(),
		weightedSsr: z.number(),
		pointsUsed: z.number(),
		parameters: z.unknown(),
		inputHash: z.string(),
		engineVersion: z.string(),
		seed: z.number()
	}),
	'fit.failed': z.object({ message: z.string() }),
	'fit.cancelled': z.object({}),
	/** An unused run held against the fit's prediction band. */
	'fit.confirmation': z.object({
		number: z.number(),
		runId: z.string(),
		runName: z.string(),
		runRevisionId: z.string(),
		revision: z.number(),
		inside: z.number(),
		counted: z.number(),
		confidence: z.number(),
		engineVersion: z.string()
	}),
	'window.computed': z.object({
		number: z.number(),
		kind: z.string(),
		engineVersion: z.string(),
		seed: z.number()
	})
};

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
	'window.computed': z.object({
		number: z.number(),
		kind: z.string(),
		engineVersion: z.string(),
		seed: z.number()
	})
};

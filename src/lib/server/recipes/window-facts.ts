import { z } from 'zod';

/** What a recipe takes from a window: the span of time in which every criterion holds, at one temperature. */
export interface WindowFacts {
	temperatureC: number | null;
	/** Hours; an open end is null. */
	fromH: number | null;
	toH: number | null;
	/** The same at the adverse one-sided 95 % bound, where the window has it. */
	fromBoundH: number | null;
	toBoundH: number | null;
	/** Criterion that sets each end, in words. */
	fromBinds: string;
	toBinds: string;
}

/** Shape that a window's result offers to recipes. */
export const windowForRecipe = z.object({
	temperatureC: z.number().nullable(),
	fromH: z.number().nullable(),
	toH: z.number().nullable(),
	fromBoundH: z.number().nullable().default(null),
	toBoundH: z.number().nullable().default(null),
	fromBinds: z.string().default(''),
	toBinds: z.string().default('')
});

export function windowFacts(result: unknown): WindowFacts | null {
	const offered = (result as { recipe?: unknown } | null)?.recipe ?? result;
	const parsed = windowForRecipe.safeParse(offered);
	return parsed.success ? parsed.data : null;
}

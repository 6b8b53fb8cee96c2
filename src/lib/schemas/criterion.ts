import { z } from 'zod';
import { id } from './quantity';

/** NMT: not more than. NLT: not less than. */
export const CRITERION_RELATIONS = ['NMT', 'NLT'] as const;

/** What the limit is counted in. A percentage never stands without its basis. */
export const CRITERION_UNITS = ['mol/L', '% of charge', 'area %', '% w/w'] as const;

/** One acceptance criterion of the study, e.g. A NMT 1.0 % of charge. */
export const criterionSchema = z.strictObject({
	species: id,
	relation: z.enum(CRITERION_RELATIONS),
	limit: z.number({ error: 'A number is expected here.' }).nonnegative(),
	unit: z.enum(CRITERION_UNITS),
	/** Where the limit comes from, in words. */
	note: z.string().trim().max(300).optional()
});
export type CriterionContent = z.infer<typeof criterionSchema>;

import { z } from 'zod';
import { criterionSchema, type CriterionContent } from './criterion';

export { criterionSchema, type CriterionContent };

export const studyForm = z.object({
	name: z.string().trim().min(3, 'Give the study a name of at least three letters.').max(120),
	/** The decision that the study is to support, in the chemist's words. */
	decision: z
		.string()
		.trim()
		.min(5, 'Say what has to be decided, for example "hold time at 50 °C".')
		.max(500),
	criteria: z.array(criterionSchema).max(20).default([])
});
export type StudyForm = z.infer<typeof studyForm>;

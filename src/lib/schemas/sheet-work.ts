import { z } from 'zod';
import { answersSchema, cellCorrectionSchema, mappingSchema } from './sheet';

/** What a person has done with one table of a sheet so far; kept beside the sheet, which stays as received. */
export const tableWorkSchema = z.strictObject({
	mapping: mappingSchema,
	answers: answersSchema.default({}),
	corrections: z.array(cellCorrectionSchema).max(2_000).default([]),
	name: z.string().max(120).default('')
});
export type TableWork = z.infer<typeof tableWorkSchema>;

export const sheetWorkSchema = z.strictObject({
	/** By the key of the table within the proposal. */
	tables: z.record(z.string().max(40), tableWorkSchema).default({})
});
export type SheetWork = z.infer<typeof sheetWorkSchema>;
export type SheetWorkInput = z.input<typeof sheetWorkSchema>;

/** What makes a table into a run, or into the next revision of one. */
export const confirmRunSchema = z.strictObject({
	tableKey: z.string().max(40),
	/** Left out: as the reader proposed it, with the conditions given beside it. */
	mapping: mappingSchema.optional(),
	/** Conditions of the run, where they do not stand in the mapping. */
	conditions: mappingSchema.shape.conditions,
	answers: answersSchema.default({}),
	corrections: z.array(cellCorrectionSchema).max(2_000).default([]),
	name: z.string().trim().max(120).default(''),
	/** The run that this table replaces, with its version and the reason. */
	revisionOf: z
		.strictObject({
			runId: z.string(),
			version: z.int().positive(),
			reason: z.string().trim().min(5, 'Say why in at least five letters.').max(500)
		})
		.optional()
});
export type ConfirmRun = z.infer<typeof confirmRunSchema>;
export type ConfirmRunInput = z.input<typeof confirmRunSchema>;

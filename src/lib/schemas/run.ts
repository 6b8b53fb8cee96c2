import { z } from 'zod';
import { fittable, id, quantity } from './quantity';

/** A measured value, a limit that it lies below or above, or nothing. */
export const assayValue = z.union([
	z.number(),
	z.strictObject({ below: z.number() }),
	z.strictObject({ above: z.number() }),
	z.null()
]);
export type AssayValue = z.infer<typeof assayValue>;

export const channelSchema = z.strictObject({
	id,
	/** Which species the channel sees, and how strongly: {A:1}, or {A:1,B:1} for co-eluting peaks. */
	weights: z.record(z.string(), z.number()),
	unit: z.string().min(1).max(20),
	/** Area per mol/L (or of the channel's unit per mol/L); 1 when left out. */
	responseFactor: fittable.optional(),
	/** Limit of quantitation in the channel's unit, where the lab states one. */
	loq: z.number().positive().optional(),
	lod: z.number().positive().optional(),
	label: z.string().max(80).optional()
});
export type ChannelContent = z.infer<typeof channelSchema>;

export const timepointSchema = z.strictObject({
	time: z.number(),
	values: z.record(z.string(), assayValue),
	/** Row of the sheet as received, and the cell of each value, for the record. */
	source: z
		.strictObject({
			sheet: z.string().max(64),
			row: z.int().positive(),
			/** Where each sample is a column of the sheet. */
			column: z.int().positive().optional(),
			cells: z.record(z.string(), z.string().max(12)).optional()
		})
		.optional(),
	sampleId: z.string().max(60).optional()
});
export type TimepointContent = z.infer<typeof timepointSchema>;

/** A point left out of fits, with the reason; it stays visible. `channel` null: the whole row. */
export const exclusionSchema = z.strictObject({
	index: z.int().nonnegative(),
	channel: z.string().nullable(),
	reasonCode: z.enum([
		'sampling error',
		'assay error',
		'temperature excursion',
		'transcription error',
		'outside the method',
		'other'
	]),
	reason: z.string().trim().min(5, 'Say why in at least five letters.').max(500),
	by: z.string().max(120).optional(),
	at: z.string().max(40).optional()
});
export type ExclusionContent = z.infer<typeof exclusionSchema>;

/** A corrected cell: the sheet as received keeps its value; the correction lies over it. */
export const correctionSchema = z.strictObject({
	sheet: z.string().max(64),
	cell: z.string().max(12),
	original: z.string().max(200),
	corrected: z.string().max(200),
	reason: z.string().trim().min(5).max(500),
	by: z.string().max(120).optional(),
	at: z.string().max(40).optional()
});

/** How a run was measured and what it gave: one experiment. */
export const runContent = z.strictObject({
	id: id.optional(),
	temperature: quantity,
	/** Measured temperature log in the run's time unit and °C, where there is one. */
	temperatureLog: z
		.array(z.strictObject({ time: z.number(), celsius: z.number() }))
		.max(20_000)
		.optional(),
	/** Whether fits take the log as the program of the run; left out: only where it leaves the stated temperature. */
	useTemperatureLog: z.boolean().optional(),
	/** Charge of each species, mol/L unless the unit says otherwise. */
	initial: z.record(z.string(), fittable),
	/** Species held constant in excess. */
	excess: z.record(z.string(), quantity).default({}),
	timeUnit: z.enum(['s', 'min', 'h', 'd']),
	timeOffset: fittable.optional(),
	/** What counts as time zero, in the lab's words. */
	timeZero: z.string().max(200).optional(),
	channels: z.array(channelSchema).min(1).max(64),
	timepoints: z.array(timepointSchema).max(20_000),
	exclusions: z.array(exclusionSchema).max(2_000).optional(),
	corrections: z.array(correctionSchema).max(2_000).optional(),
	/** Whether equal times are separate samples (true replicates) or injections of one sample. */
	replicates: z.enum(['samples', 'injections']).optional(),
	/** What each conversion from the sheet did, in words, for the record. */
	conversions: z.array(z.string().max(400)).max(500).optional()
});
export type RunContent = z.infer<typeof runContent>;

import { z } from 'zod';
import { criterionSchema } from './criterion';
import { id } from './quantity';

export const RECIPE_STATES = [
	'draft',
	'in review',
	'returned',
	'validated',
	'superseded',
	'withdrawn'
] as const;
export type RecipeState = (typeof RECIPE_STATES)[number];

/** What a signature says. None of them is process validation. */
export const MEANINGS = ['Authored', 'Validated', 'Verified'] as const;
export type Meaning = (typeof MEANINGS)[number];

const line = (max: number) => z.string().trim().max(max);
const finite = z.number({ error: 'A number is expected here.' });
/** Lower and upper end, in the unit of the record that it belongs to; an open end is null. */
export const rangeSchema = z
	.tuple([finite.nullable(), finite.nullable()])
	.refine(
		([low, high]) => low === null || high === null || low <= high,
		'The lower end lies above the upper.'
	);
export type Range = z.infer<typeof rangeSchema>;

export const SET_POINT_KINDS = ['temperature', 'time', 'charge', 'excess', 'other'] as const;

export const setPointSchema = z.strictObject({
	id,
	kind: z.enum(SET_POINT_KINDS),
	parameter: line(80).min(1, 'Name the parameter.'),
	/** The species that a charge or an excess concerns. */
	species: line(40).optional(),
	unit: line(20).min(1, 'Give the unit.'),
	value: finite,
	/** Normal operating range: what the plant is expected to keep. Industry usage, not an ICH definition. */
	nor: rangeSchema.nullable().default(null),
	/** Proven acceptable range, one parameter at a time with the others constant (ICH Q8(R2)). */
	par: rangeSchema.nullable().default(null),
	/** The criterion or the fact that sets each end of the range, in words. */
	binds: line(160).default(''),
	/** Range that the runs behind the fit cover. */
	studied: rangeSchema.nullable().default(null)
});
export type SetPoint = z.infer<typeof setPointSchema>;

/** How long the batch may stay at its hold temperature, with where the figure comes from. Always rounded down. */
export const holdSchema = z.strictObject({
	temperatureC: finite.nullable(),
	unit: z.enum(['min', 'h', 'd']),
	/** From the estimates alone. */
	nominal: finite.nullable(),
	/** At the one-sided 95 % bound of the parameters, where it was computed. */
	bound: finite.nullable(),
	/** What the recipe prints: the bound (or the nominal where there is none), rounded down. */
	stated: finite.nonnegative().nullable(),
	/** Earliest time that meets the criteria, rounded up. */
	notBefore: finite.nonnegative().nullable().default(null),
	limits: line(160).default(''),
	basis: line(400).default('')
});
export type Hold = z.infer<typeof holdSchema>;

export const chargeMeasure = z.discriminatedUnion('by', [
	z.strictObject({ by: z.literal('limiting') }),
	z.strictObject({ by: z.literal('equivalents'), value: finite.nonnegative() }),
	/** Litres per kilogram of the limiting material. */
	z.strictObject({ by: z.literal('volumes'), value: finite.nonnegative() }),
	/** Kilograms per kilogram of the limiting material. */
	z.strictObject({ by: z.literal('weight'), value: finite.nonnegative() }),
	/** Fill up until the limiting material has this concentration, mol/L. */
	z.strictObject({ by: z.literal('fill to'), value: finite.positive() })
]);
export type ChargeMeasure = z.infer<typeof chargeMeasure>;

export const chargeSchema = z.strictObject({
	id,
	material: line(120).min(1, 'Name the material.'),
	role: line(60).default(''),
	species: line(40).optional(),
	measure: chargeMeasure,
	molarMassGPerMol: finite.positive().max(1e7).nullable().default(null),
	densityKgPerL: finite.positive().max(30).nullable().default(null),
	/** Assay % w/w of the material as charged. */
	assayPercent: finite.positive().max(100).nullable().default(null),
	/** For a reagent charged as a solution. */
	solutionMolPerL: finite.positive().max(100).nullable().default(null),
	tolerancePercent: finite.nonnegative().max(100).nullable().default(null)
});
export type ChargeLine = z.infer<typeof chargeSchema>;

export const SCALE_UNITS = ['g', 'kg', 'mol', 'L'] as const;
export const scaleSchema = z.strictObject({
	/** g, kg or mol of the limiting material; L of reaction mixture at the set-point concentration. */
	value: finite.positive('The scale must be above zero.').max(1e9),
	unit: z.enum(SCALE_UNITS)
});
export type Scale = z.infer<typeof scaleSchema>;

export const OPERATION_KINDS = [
	'Charge',
	'Dose',
	'Heat',
	'Hold',
	'Sample',
	'Cool',
	'Quench',
	'Wait',
	'Transfer',
	'Separate',
	'Other'
] as const;

/** One operation of the procedure, in the words of ISA-88: unit procedure > operation > phase. */
export const operationSchema = z.strictObject({
	id,
	unitProcedure: line(80).default(''),
	kind: z.enum(OPERATION_KINDS),
	text: line(600).default(''),
	durationMin: finite.nonnegative().max(1e6).nullable().default(null),
	maxDurationMin: finite.nonnegative().max(1e6).nullable().default(null),
	fromC: finite.min(-273.15).max(2000).nullable().default(null),
	toC: finite.min(-273.15).max(2000).nullable().default(null),
	phases: z.array(line(300).min(1)).max(20).default([])
});
export type Operation = z.infer<typeof operationSchema>;

export const ipcSchema = z.strictObject({
	id,
	/** The operation in which the sample is taken. */
	operation: line(40).nullable().default(null),
	atMin: finite.nonnegative().max(1e6).nullable().default(null),
	test: line(200).min(1, 'Say what is tested.'),
	limit: line(120).default(''),
	/** Time from sample to result: the batch keeps reacting meanwhile. */
	lagMin: finite.nonnegative().max(1e5).nullable().default(null),
	ifNotMet: line(300).default('')
});
export type Ipc = z.infer<typeof ipcSchema>;

export const hazardSchema = z.strictObject({
	id,
	product: line(120).min(1, 'Name the product as on its safety data sheet.'),
	supplier: line(120).min(1, 'Name the supplier of the safety data sheet.'),
	/** Revision date of the supplier's safety data sheet, as printed on it. */
	revisionDate: z.string().regex(/^\d{4}-\d{2}-\d{2}$/, 'Give the revision date of the safety data sheet.'),
	language: line(20).default('en'),
	signalWord: z.enum(['', 'Danger', 'Warning']).default(''),
	statements: z
		.array(z.strictObject({ code: line(30).min(1), text: line(400).min(1) }))
		.max(60)
		.default([])
});
export type HazardSheet = z.infer<typeof hazardSchema>;

/** Measured heat and gas data, for cautions only. Nothing here is ever defaulted. */
export const heatSchema = z.strictObject({
	/** Heat of reaction per mole of the limiting material, negative when heat is given off. */
	reactionEnthalpyKJPerMol: finite.nullable().default(null),
	limitingMolPerKg: finite.positive().nullable().default(null),
	heatCapacityKJPerKgK: finite.positive().nullable().default(null),
	doseTimeH: finite.positive().nullable().default(null),
	/** Id of the rate constant that consumes the dosed reagent, e.g. s1.forward.kRef. */
	doseParameter: line(80).nullable().default(null),
	mttC: finite.nullable().default(null),
	td24C: finite.nullable().default(null),
	td24Reference: line(200).default(''),
	gasMolPerMol: finite.nonnegative().nullable().default(null),
	ventCapacityM3PerH: finite.positive().nullable().default(null),
	batchMassKg: finite.positive().nullable().default(null),
	coolingCapacityKW: finite.positive().nullable().default(null),
	source: line(300).default(''),
	/** Number of the site's own assessment, its scope and its expiry, when there is one. */
	siteAssessment: line(200).default('')
});
export type HeatData = z.infer<typeof heatSchema>;

/** Where the recipe's figures come from: printed on it, and part of what is signed. */
export const basisSchema = z.strictObject({
	fitNumber: z.int().positive(),
	schemeName: line(120),
	schemeNumber: z.int().positive(),
	runs: z
		.array(z.strictObject({ id: z.uuid(), number: z.int(), revision: z.int(), name: line(120) }))
		.max(100),
	windowNumber: z.int().positive().nullable().default(null),
	inputHash: line(64),
	engineVersion: line(40),
	studiedTemperatureC: rangeSchema.nullable().default(null),
	studiedChargeMolPerL: z.record(z.string(), rangeSchema).default({}),
	lastTimeH: finite.nullable().default(null)
});
export type RecipeBasis = z.infer<typeof basisSchema>;

export const recipeContent = z.strictObject({
	title: line(120).min(3, 'Give the recipe a title of at least three letters.'),
	/** The wanted compound and the decision that the recipe carries out. */
	target: line(500).default(''),
	criteria: z.array(criterionSchema).max(20).default([]),
	basis: basisSchema,
	setPoints: z.array(setPointSchema).max(40).default([]),
	hold: holdSchema.nullable().default(null),
	scale: scaleSchema,
	charges: z.array(chargeSchema).max(60).default([]),
	equipment: z
		.array(z.strictObject({ id, text: line(300).min(1) }))
		.max(40)
		.default([]),
	procedure: z.array(operationSchema).max(100).default([]),
	ipc: z.array(ipcSchema).max(40).default([]),
	hazards: z.array(hazardSchema).max(40).default([]),
	heat: heatSchema,
	/** A run that the fit has not seen, to hold the kinetics against. */
	confirmationRunId: z.uuid().nullable().default(null),
	/** Asked for where the fit has findings that stop; prints on the record. */
	justification: line(2000).default(''),
	other: line(4000).default('')
});
export type RecipeContent = z.infer<typeof recipeContent>;

export const reasonText = z
	.string()
	.trim()
	.max(500)
	.refine(
		(text) => (text.match(/\p{L}/gu) ?? []).length >= 5,
		'Give the reason in at least five letters, so that a reader understands it later.'
	);
export const commentText = z.string().trim().min(5, 'Write a comment of at least five letters.').max(2000);

export const createRecipeForm = z.object({
	fitId: z.uuid('Choose the fit that the recipe rests on.'),
	windowId: z.uuid().nullish(),
	title: z.string().trim().min(3, 'Give the recipe a title of at least three letters.').max(120),
	scale: scaleSchema.optional()
});
export type CreateRecipeForm = z.infer<typeof createRecipeForm>;

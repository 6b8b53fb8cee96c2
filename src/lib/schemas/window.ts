import { z } from 'zod';
import { criterionSchema } from './criterion';
import { id, quantity } from './quantity';

export const WINDOW_TIME_UNITS = ['s', 'min', 'h', 'd'] as const;
export type WindowTimeUnit = (typeof WINDOW_TIME_UNITS)[number];

/** What is asked of the window station in its first form: one temperature, one charge, the criteria on the closed form. */
export const firstFormRequest = z.strictObject({
	temperature: quantity,
	/** mol/L of each species charged; species left out start at zero. */
	charge: z.record(id, quantity),
	/** mol/L of each species held in excess. */
	excess: z.record(id, quantity).default({}),
	criteria: z.array(criterionSchema).max(20).default([]),
	/** Species whose maximum is wanted; left out: every species that has one. */
	maximaOf: z.array(id).max(64).optional(),
	/** Latest time that counts; left out: no end. */
	horizon: quantity.optional(),
	/** Relative response factors, molar basis, for limits in area %; 1 where left out. */
	responseFactors: z.record(id, z.number().positive()).default({}),
	/** Unit of every time in the answer. */
	timeUnit: z.enum(WINDOW_TIME_UNITS).default('h'),
	draws: z.int().min(2_000).max(20_000).default(2_000),
	seed: z
		.int()
		.min(0)
		.max(2 ** 31 - 1)
		.default(1),
	confidenceLevel: z.number().min(0.5).max(0.999).default(0.95),
	/** A temperature outside the studied range is refused unless this is set; the answer is then marked as outside. */
	allowOutsideStudied: z.boolean().default(false)
});
export type FirstFormRequest = z.infer<typeof firstFormRequest>;
export type FirstFormRequestInput = z.input<typeof firstFormRequest>;

/** A time or value with its interval from the fit. Times are in the answer's time unit. */
export interface Figure {
	/** At the estimates: reached (`value` is a number), without end, or never. */
	state: 'reached' | 'no end' | 'never';
	/** At the estimates; null: never, or without end. */
	value: number | null;
	/**
	 * Two-sided interval at the confidence level, from the draws. Null: there is none at all (nothing was fitted that matters,
	 * or a constant is not determined). An end that is null is open: too many draws never get there.
	 */
	interval: [number | null, number | null] | null;
	/** One-sided bounds at the confidence level, from the draws; null: open. */
	lower: number | null;
	upper: number | null;
	/** Share of the draws in which there is no such time, %. */
	neverPercent: number;
	/** The same two-sided interval by first-order propagation, as a check; null where it cannot be had. */
	firstOrder: [number, number] | null;
}

export interface MaximumAnswer {
	species: string;
	/** `interior`: a true maximum; `at start`: falls from the charge on; `at end`: rises towards its final value or the horizon. */
	kind: 'interior' | 'at start' | 'at end';
	time: Figure;
	/** mol/L. */
	concentration: Figure;
	percentOfCharge: Figure;
	/** First and last time within 1 % of the maximum. */
	withinOnePercent: { from: Figure; to: Figure } | null;
	sentence: string;
}

/** A span of time; an end that is null goes on without end (or to the horizon). */
export interface Span {
	from: number;
	to: number | null;
}

export interface CriterionAnswer {
	/** Place in the request's list. */
	index: number;
	/** "A NMT 1.0 % of charge" */
	text: string;
	/** All spans in which it holds, at the estimates. */
	spans: Span[];
	/** First time from which it holds, and when that span ends. */
	from: Figure;
	to: Figure;
	/** Why it is never met: "equilibrium at 25.0 % of charge". Null where it is met at some time. */
	never: string | null;
	sentence: string;
}

export interface HoldSpan extends Span {
	/** Criterion (place in the list) that sets each end; null: the charge itself, the horizon, or no end. */
	bindsFrom: number | null;
	bindsTo: number | null;
}

export interface HoldAnswer {
	/** All spans in which every criterion holds, at the estimates. */
	spans: HoldSpan[];
	/** Of the longest span. */
	from: Figure;
	to: Figure;
	/** Within one draw from opening to closing. */
	length: Figure;
	/** From the longest span: the part of it that lies inside in the asked share of the draws; null: none is left. */
	robust: Span | null;
	/** `robust`, opening rounded up and closing rounded down to two significant digits. What a recipe may print. */
	stated: Span | null;
	/** In how many draws no time meets every criterion, %. */
	neverPercent: number;
	sentence: string;
}

export interface FirstFormResult {
	kind: 'first form';
	/** One line for the station strip. */
	summary: string;
	temperatureC: number;
	studiedTemperatureC: [number, number] | null;
	outsideStudied: boolean;
	timeUnit: WindowTimeUnit;
	/** mol/L over all species charged: 100 % of charge. */
	totalChargeMolPerL: number;
	maxima: MaximumAnswer[];
	criteria: CriterionAnswer[];
	/** Null without criteria. */
	hold: HoldAnswer | null;
	/** Composition that the batch tends to, mol/L. */
	finalMolPerL: Record<string, number>;
	/** In plain words: what the figures rest on, and what limits them. */
	notes: { level: 'caution' | 'note'; code: string; message: string }[];
	/** Fitted parameters that were varied. */
	varied: string[];
	confidenceLevel: number;
	draws: number;
	/** Draws that gave no usable constants and were left out. */
	drawsLeftOut: number;
	seed: number;
	engineVersion: string;
}

/** Temperature × time: where every criterion holds, and in which share of the draws. */
export const windowMapRequest = z.strictObject({
	temperatures: z.strictObject({
		from: quantity,
		to: quantity,
		count: z.int().min(2).max(200).default(60)
	}),
	times: z.strictObject({ from: quantity, to: quantity, count: z.int().min(2).max(400).default(60) }),
	charge: z.record(id, quantity),
	excess: z.record(id, quantity).default({}),
	criteria: z.array(criterionSchema).min(1).max(20),
	responseFactors: z.record(id, z.number().positive()).default({}),
	timeUnit: z.enum(WINDOW_TIME_UNITS).default('h'),
	/** Asked of every point of the rectangle. */
	probability: z.number().min(0.5).max(0.999).default(0.95),
	draws: z.int().min(200).max(20_000).default(2_000),
	seed: z
		.int()
		.min(0)
		.max(2 ** 31 - 1)
		.default(1),
	/** A set-point with its tolerances, to be held against the map. */
	setPoint: z
		.strictObject({
			temperature: quantity,
			temperatureTolerance: z.number().nonnegative(),
			time: quantity,
			/** In the unit of `time`. */
			timeTolerance: z.number().nonnegative()
		})
		.optional()
});
export type WindowMapRequest = z.infer<typeof windowMapRequest>;
export type WindowMapRequestInput = z.input<typeof windowMapRequest>;

export interface WindowRectangle {
	temperatureC: [number, number];
	/** In the map's time unit. */
	time: [number, number];
	/** Lowest probability at any point of the map inside. */
	lowestProbability: number;
}

export interface SetPointAnswer {
	/** True where every point looked at meets every criterion at the estimates and with the asked probability. */
	robust: boolean;
	/** The point of the box that is worst. */
	worst: { temperatureC: number; time: number; probability: number; binds: number };
	sentence: string;
}

export interface WindowMapResult {
	kind: 'map';
	summary: string;
	temperaturesC: number[];
	times: number[];
	timeUnit: WindowTimeUnit;
	/** Temperature-major: probability[i·times + k]. Null where no draws could be made. */
	probability: number[] | null;
	/** Whether every criterion holds at the estimates, temperature-major. */
	holds: boolean[];
	/** How far inside its limit the tightest criterion is at the estimates, as a share of the limit; negative: exceeded. */
	margin: number[];
	/** That criterion's place in the list. */
	binds: number[];
	/** Temperatures outside the studied range. */
	outsideStudied: boolean[];
	/** Candidate operating window: the largest rectangle that holds at the asked probability; null: there is none. */
	rectangle: WindowRectangle | null;
	setPoint: SetPointAnswer | null;
	criteria: string[];
	notes: FirstFormResult['notes'];
	draws: number;
	drawsLeftOut: number;
	seed: number;
	engineVersion: string;
}

import { z } from 'zod';
import { id } from './quantity';

/** NMT: not more than. NLT: not less than. */
export const CRITERION_RELATIONS = ['NMT', 'NLT'] as const;

/** What the limit is counted in. A percentage never stands without its basis. */
export const CRITERION_UNITS = [
	'mol/L',
	'% of charge',
	'area %',
	'% w/w',
	'mmol/L',
	'mol %',
	/** Conversion, selectivity and solution yield alone: what they are a percentage of is in their name. */
	'%',
	/** A plain number: the ratio of two species. */
	'1'
] as const;

/**
 * What is limited. `amount`: the species itself (the default). `conversion`: (A₀ − A)/A₀. `selectivity`: species formed per
 * `versus` consumed. `solution yield`: species formed per `versus` charged. `ratio`: species over `versus`.
 */
export const CRITERION_QUANTITIES = [
	'amount',
	'conversion',
	'selectivity',
	'solution yield',
	'ratio'
] as const;
export type CriterionQuantity = (typeof CRITERION_QUANTITIES)[number];

/** Units that make sense for each quantity. */
export const UNITS_OF_QUANTITY: Record<CriterionQuantity, readonly (typeof CRITERION_UNITS)[number][]> = {
	amount: ['mol/L', 'mmol/L', '% of charge', 'mol %', 'area %', '% w/w'],
	conversion: ['%'],
	selectivity: ['%'],
	'solution yield': ['%'],
	ratio: ['1', '%']
};

/** One acceptance criterion of the study, e.g. A NMT 1.0 % of charge. */
export const criterionSchema = z
	.strictObject({
		species: id,
		relation: z.enum(CRITERION_RELATIONS),
		limit: z.number({ error: 'A number is expected here.' }).nonnegative(),
		unit: z.enum(CRITERION_UNITS),
		/** Left out: the amount of the species. */
		quantity: z.enum(CRITERION_QUANTITIES).optional(),
		/** The other species of a ratio, a selectivity or a yield; of `% of charge` the one whose charge counts. */
		versus: id.optional(),
		/** Where the limit comes from, in words. */
		note: z.string().trim().max(300).optional()
	})
	.superRefine((criterion, context) => {
		const quantity = criterion.quantity ?? 'amount';
		if (!UNITS_OF_QUANTITY[quantity].includes(criterion.unit))
			context.addIssue({
				code: 'custom',
				path: ['unit'],
				message: `${quantity} is limited in ${UNITS_OF_QUANTITY[quantity].join(', ')}; found ${criterion.unit}. Choose one of these.`
			});
		const needsVersus = quantity === 'ratio' || quantity === 'selectivity' || quantity === 'solution yield';
		if (needsVersus && !criterion.versus)
			context.addIssue({
				code: 'custom',
				path: ['versus'],
				message: `A ${quantity} needs a second species. Choose it.`
			});
	});
export type CriterionContent = z.infer<typeof criterionSchema>;

/**
 * Acceptance criteria as linear functions of the concentrations.
 *
 * Problem: "C NMT 3.0 % of charge", "conversion of A NLT 99 %", "selectivity to B NLT 95 %", "B : C NLT 20", "C NMT 0.15 area %".
 * Each of them is the sign of one weighted sum, so that one root finder serves all:
 *
 *     holds where g(c) = Σ w_i c_i + w₀ ≤ 0
 *
 * | criterion (NMT; NLT has the opposite sign) | g |
 * | --- | --- |
 * | amount of X ≤ L | c_X − L |
 * | X ≤ p of the charge | c_X − p Σ c(0), or p c_V(0) where `versus` names a species |
 * | X ≤ p mol %, area %, % w/w | f_X c_X − p Σ f_i c_i, f = 1, response factor, molar mass; species in excess left out |
 * | conversion of A ≤ p | (1 − p) c_A(0) − c_A |
 * | selectivity to B ≤ p | (c_B − c_B(0)) − p (c_A(0) − c_A) |
 * | solution yield of B ≤ p | (c_B − c_B(0)) − p c_A(0) |
 * | ratio X : Y ≤ r | c_X − r c_Y |
 *
 * Words: ICH Q6A; NMT not more than, NLT not less than. Equality holds.
 */
import type { CriterionContent } from '../schemas/criterion';
import type { Network } from './types';

export interface Criterion {
	/** "C NMT 3.0 % of charge" */
	text: string;
	/** w_i of g, in species order: the criterion holds where Σ w_i c_i + constant ≤ 0. */
	weights: Float64Array;
	constant: number;
	/** The limited quantity in its own unit, for any composition; NaN where it has no meaning (0/0). */
	value: (c: ArrayLike<number>) => number;
	/** What follows the number: " % of charge", " mol/L". */
	unitText: string;
	/** True where the species takes part in a reversible step: its limit t → ∞ is an equilibrium. */
	reversible: boolean;
}

export interface CriterionContext {
	network: Network;
	/** mol/L, in species order. */
	charge: ArrayLike<number>;
	/** Relative response factors, molar basis, for area %; 1 where left out. */
	responseFactors?: Readonly<Record<string, number>>;
	/** Number of decimals etc.: how limits are written; the shortest form by default. */
	format?: (value: number) => string;
}

/** A criterion that cannot be applied to this scheme and charge: what was found, what is expected, one way out. */
export class CriterionError extends Error {
	constructor(
		readonly code: 'unknown species' | 'missing molar mass' | 'missing charge',
		message: string
	) {
		super(message);
		this.name = 'CriterionError';
	}
}

/** Quantity = Σ top_i c_i + topConstant over Σ bottom_i c_i + bottomConstant, times `scale` for its unit. */
interface Fraction {
	top: Float64Array;
	topConstant: number;
	bottom: Float64Array;
	bottomConstant: number;
	/** Limit in the unit × this = the plain fraction or mol/L. */
	unit: number;
}

/** @throws CriterionError */
export function toCriterion(content: CriterionContent, context: CriterionContext): Criterion {
	const { network } = context;
	const fraction = fractionOf(content, context);
	const limit = content.limit * fraction.unit;
	const sign = content.relation === 'NMT' ? 1 : -1;
	const weights = fraction.top.map((top, i) => sign * (top - limit * fraction.bottom[i]));
	return {
		text: criterionText(content, context.format),
		weights,
		constant: sign * (fraction.topConstant - limit * fraction.bottomConstant),
		unitText: content.unit === '1' ? '' : ` ${content.unit}`,
		value(c) {
			let top = fraction.topConstant;
			let bottom = fraction.bottomConstant;
			for (let i = 0; i < weights.length; i++) {
				top += fraction.top[i] * c[i];
				bottom += fraction.bottom[i] * c[i];
			}
			return top / bottom / fraction.unit;
		},
		reversible: network.steps.some(
			(step) =>
				step.reverse !== null &&
				(step.reactant === content.species || step.products.some((p) => p.species === content.species))
		)
	};
}

function fractionOf(content: CriterionContent, context: CriterionContext): Fraction {
	const { charge, network } = context;
	const n = network.species.length;
	const x = place(network, content.species);
	const versus = content.versus === undefined ? null : place(network, content.versus);
	const one = (i: number, value = 1) => Float64Array.from({ length: n }, (_, j) => (j === i ? value : 0));
	const none = new Float64Array(n);
	const charged = (i: number): number => {
		if (charge[i] > 0) return charge[i];
		throw new CriterionError(
			'missing charge',
			`${network.species[i].id} is not in the charge, so no percentage of it can be formed. Charge it, or choose another species.`
		);
	};
	switch (content.quantity ?? 'amount') {
		case 'conversion':
			return {
				top: one(x, -1),
				topConstant: charge[x],
				bottom: none,
				bottomConstant: charged(x),
				unit: 0.01
			};
		case 'selectivity': {
			const a = versus!;
			return {
				top: one(x),
				topConstant: -charge[x],
				bottom: one(a, -1),
				bottomConstant: charged(a),
				unit: 0.01
			};
		}
		case 'solution yield':
			return {
				top: one(x),
				topConstant: -charge[x],
				bottom: none,
				bottomConstant: charged(versus!),
				unit: 0.01
			};
		case 'ratio':
			return {
				top: one(x),
				topConstant: 0,
				bottom: one(versus!),
				bottomConstant: 0,
				unit: content.unit === '%' ? 0.01 : 1
			};
		case 'amount':
			return amountOf(content, context, x, versus, charged);
	}
}

function amountOf(
	content: CriterionContent,
	context: CriterionContext,
	x: number,
	versus: number | null,
	charged: (i: number) => number
): Fraction {
	const { charge, network, responseFactors } = context;
	const n = network.species.length;
	const none = new Float64Array(n);
	const top = new Float64Array(n);
	top[x] = 1;
	const whole = { top, topConstant: 0, bottom: none };
	switch (content.unit) {
		case 'mol/L':
			return { ...whole, bottomConstant: 1, unit: 1 };
		case 'mmol/L':
			return { ...whole, bottomConstant: 1, unit: 1e-3 };
		case '% of charge': {
			if (versus !== null) return { ...whole, bottomConstant: charged(versus), unit: 0.01 };
			let total = 0;
			network.species.forEach((species, i) => {
				if (species.role !== 'reagent in excess') total += charge[i];
			});
			if (!(total > 0)) charged(x);
			return { ...whole, bottomConstant: total, unit: 0.01 };
		}
		default: {
			const factor = (i: number): number => {
				const species = network.species[i];
				if (species.role === 'reagent in excess' && i !== x) return 0;
				if (content.unit === 'area %') return responseFactors?.[species.id] ?? 1;
				if (content.unit !== '% w/w') return 1;
				if (species.molarMassGPerMol) return species.molarMassGPerMol;
				throw new CriterionError(
					'missing molar mass',
					`A limit in % w/w needs the molar mass of every species; ${species.id} has none. Add it on the scheme page, or give the limit in mol %.`
				);
			};
			const bottom = Float64Array.from({ length: n }, (_, i) => factor(i));
			top[x] = bottom[x];
			return { ...whole, bottom, bottomConstant: 0, unit: 0.01 };
		}
	}
}

function place(network: Network, id: string): number {
	const index = network.species.findIndex((species) => species.id === id);
	if (index >= 0) return index;
	throw new CriterionError(
		'unknown species',
		`A criterion names the species ${id}, which the scheme does not have. It has ${network.species.map((s) => s.id).join(', ')}.`
	);
}

/** "C NMT 3 % of charge", "conversion of A NLT 99 %", "selectivity to B per A consumed NLT 95 %", "B : C NLT 20". */
export function criterionText(content: CriterionContent, format: (value: number) => string = String): string {
	const limit = `${content.relation} ${format(content.limit)}${content.unit === '1' ? '' : ` ${content.unit}`}`;
	switch (content.quantity ?? 'amount') {
		case 'conversion':
			return `conversion of ${content.species} ${limit}`;
		case 'selectivity':
			return `selectivity to ${content.species} per ${content.versus} consumed ${limit}`;
		case 'solution yield':
			return `solution yield of ${content.species} on ${content.versus} charged ${limit}`;
		case 'ratio':
			return `${content.species} : ${content.versus} ${limit}`;
		case 'amount': {
			const basis = content.unit === '% of charge' && content.versus ? ` of ${content.versus}` : '';
			return `${content.species} ${limit}${basis}`;
		}
	}
}

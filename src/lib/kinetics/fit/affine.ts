/**
 * Affine functions of the estimated parameters, b + Σ A_j x_j: how a constant, a charge, an offset or the logarithm of a
 * response factor follows from them, through ties.
 */
import type { Slot } from './slots';

/** An affine function of the estimated parameters. */
export interface Linear {
	constant: number;
	terms: { free: number; coefficient: number }[];
}

/** The affine form of a slot's value on the scale of estimation, through its ties. */
export function linearOf(slots: Map<string, Slot>, free: Slot[], id: string): Linear {
	const slot = slots.get(id);
	if (!slot) return { constant: NaN, terms: [] };
	if (slot.tie) {
		const target = linearOf(slots, free, slot.tie.to);
		const { factor } = slot.tie;
		if (slot.scale === 'ln') return { constant: target.constant + Math.log(factor), terms: target.terms };
		return {
			constant: target.constant * factor,
			terms: target.terms.map((t) => ({ free: t.free, coefficient: t.coefficient * factor }))
		};
	}
	const position = free.indexOf(slot);
	if (position >= 0) return { constant: 0, terms: [{ free: position, coefficient: 1 }] };
	return { constant: slot.scale === 'ln' ? Math.log(slot.value) : slot.value, terms: [] };
}

export const scaleLinear = (linear: Linear, factor: number): Linear => ({
	constant: linear.constant * factor,
	terms: linear.terms.map((t) => ({ free: t.free, coefficient: t.coefficient * factor }))
});

/** Sum of affine functions; terms of the same parameter are joined. */
export function sumLinear(...parts: Linear[]): Linear {
	const coefficients = new Map<number, number>();
	let constant = 0;
	for (const part of parts) {
		constant += part.constant;
		for (const t of part.terms) coefficients.set(t.free, (coefficients.get(t.free) ?? 0) + t.coefficient);
	}
	const terms = [...coefficients]
		.filter(([, c]) => c !== 0)
		.map(([free, coefficient]) => ({ free, coefficient }));
	return { constant, terms };
}

export const evaluateLinear = (linear: Linear, x: ArrayLike<number>): number => {
	let value = linear.constant;
	for (let i = 0; i < linear.terms.length; i++)
		value += linear.terms[i].coefficient * x[linear.terms[i].free];
	return value;
};

export const constantLinear = (constant: number): Linear => ({ constant, terms: [] });

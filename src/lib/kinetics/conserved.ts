/**
 * Conserved totals: weighted sums of species that no step changes, whatever its constant.
 *
 * Problem: with N the stoichiometric matrix (species × steps), every m with mᵀN = 0 gives a total Σ m_i c_i that stays at its
 * value at the charge: a left null vector of K for all constants at once. The species are ordered upstream first, so that
 * elimination takes upstream species as pivots and the weights come out as counts of downstream ones.
 *
 * | symbol | name here |
 * | --- | --- |
 * | m | `ConservedTotal.weights`, in species order |
 */
import { componentsOf } from './components';
import type { Network } from './types';

export interface ConservedTotal {
	/** Weight of each species, in species order. */
	weights: Float64Array;
	/** For example `A + B + C` or `2 A + B`. */
	name: string;
	/** The weighted sum of the charge, mol/L, when a charge was given. */
	total?: number;
}

/** Smallest pivot that is not rounding: coefficients are numbers like 1, 2 or ½. */
const PIVOT = 1e-9;

/** All independent conserved totals; a loss leaves none over the species that it drains. */
export function conservedTotals(network: Network, charge?: ArrayLike<number>): ConservedTotal[] {
	const order = upstreamFirst(network);
	return nullVectors(stoichiometry(network), order).map((weights) => {
		const total = charge ? weights.reduce((sum, w, i) => sum + w * charge[i], 0) : undefined;
		return { weights, name: totalName(network, weights), ...(total === undefined ? {} : { total }) };
	});
}

/** One row per step: −1 at its reactant, the coefficients at its products. */
function stoichiometry(network: Network): Float64Array[] {
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const rows: Float64Array[] = [];
	for (const step of network.steps) {
		const row = new Float64Array(network.species.length);
		const from = index.get(step.reactant);
		if (from === undefined) continue;
		row[from] -= 1;
		for (const product of step.products) {
			const to = index.get(product.species);
			if (to !== undefined) row[to] += product.coefficient;
		}
		rows.push(row);
	}
	return rows;
}

function upstreamFirst(network: Network): number[] {
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const successors: number[][] = network.species.map(() => []);
	for (const step of network.steps) {
		const from = index.get(step.reactant);
		for (const product of step.products) {
			const to = index.get(product.species);
			if (from !== undefined && to !== undefined) successors[from].push(to);
		}
	}
	return componentsOf(successors).blocks.flatMap((block) => Array.from(block));
}

function nullVectors(rows: Float64Array[], order: number[]): Float64Array[] {
	const pivotOf = new Map<number, Float64Array>();
	let left = rows;
	for (const column of order) {
		const pivot = left.reduce<Float64Array | null>(
			(best, row) => (Math.abs(row[column]) > Math.abs(best?.[column] ?? 0) ? row : best),
			null
		);
		if (!pivot || Math.abs(pivot[column]) < PIVOT) continue;
		const scale = pivot[column];
		for (let i = 0; i < pivot.length; i++) pivot[i] /= scale;
		left = left.filter((row) => row !== pivot);
		for (const row of [...left, ...pivotOf.values()]) {
			const factor = row[column];
			if (factor !== 0) for (let i = 0; i < row.length; i++) row[i] -= factor * pivot[i];
		}
		pivotOf.set(column, pivot);
	}
	const free = order.filter((column) => !pivotOf.has(column));
	return free.map((column) => tidied(nullVector(column, pivotOf, order.length)));
}

function nullVector(column: number, pivotOf: Map<number, Float64Array>, n: number): Float64Array {
	const weights = new Float64Array(n);
	weights[column] = 1;
	for (const [pivotColumn, row] of pivotOf) weights[pivotColumn] = -row[column];
	return weights;
}

/** Clears rounding and scales the smallest weight to 1. */
function tidied(weights: Float64Array): Float64Array {
	const clean = weights.map((w) => (Math.abs(w) < PIVOT ? 0 : w));
	const smallest = clean.reduce((low, w) => (w !== 0 ? Math.min(low, Math.abs(w)) : low), Infinity);
	return clean.map((w) => {
		const scaled = w / smallest;
		return Math.abs(scaled - Math.round(scaled)) < 1e-9 ? Math.round(scaled) + 0 : scaled;
	});
}

function totalName(network: Network, weights: Float64Array): string {
	const parts: string[] = [];
	weights.forEach((w, i) => {
		if (w === 0) return;
		const size = Math.abs(w) === 1 ? '' : `${Number(Math.abs(w).toPrecision(4))} `;
		const sign = w < 0 ? '\u2212 ' : parts.length > 0 ? '+ ' : '';
		parts.push(`${sign}${size}${network.species[i].id}`);
	});
	return parts.join(' ');
}

/**
 * The limit t → ∞ without eigenvalues and without subtraction.
 *
 * Problem: which composition a batch tends to, and how much material has passed through each species on the way. Components
 * are taken upstream first. One that loses material (exits) ends empty, and N = ∫₀^∞ c dt of its species follows from what
 * arrived; one that keeps everything ends in its stationary distribution.
 *
 *     (−K_bb) N_b = arrivals_b,   arrivals_i += Σ_j k_{j→i} ν_i N_j
 *     K_bb π = 0,  Σ w π = 1,     c_b(∞) = π Σ w arrivals
 *
 * | symbol | name here |
 * | --- | --- |
 * | N_j | `throughput[j]`, mol/L·s (Infinity where material stays for good) |
 * | c(∞) | `final[j]`, mol/L (Infinity where a constant feed piles up without limit) |
 *
 * Elimination by Grassmann, Taksar and Heyman, Oper. Res. 33 (1985) 1107: every pivot is a sum of rates, so each result has a
 * small relative error however stiff the scheme (C. A. O'Cinneide, Numer. Math. 65 (1993) 109).
 */
import { blockWeights, type BlockWeights } from './block-weights';
import { components, type Components } from './components';
import type { LinearSystem } from './types';

export interface FinalComposition {
	final: Float64Array;
	throughput: Float64Array;
}

export function finalComposition(
	system: LinearSystem,
	charge: ArrayLike<number>,
	parts: Components = components(system),
	balance: BlockWeights = blockWeights(system, parts)
): FinalComposition {
	const arrivals = Float64Array.from({ length: system.n }, (_, i) => charge[i]);
	const final = new Float64Array(system.n);
	const throughput = new Float64Array(system.n);
	for (const block of parts.blocks) {
		const rates = internalRates(system, block, balance.weights);
		const exits = Float64Array.from(block, (i) => balance.exits[i]);
		const weighted = Float64Array.from(block, (i) => arrivals[i] * balance.weights[i]);
		const leaks = exits.some((rate) => rate > 0);
		const total = weighted.reduce((a, b) => a + b, 0);
		const result = leaks ? transient(rates, exits, weighted) : stationary(rates, total);
		block.forEach((species, k) => {
			const amount = result[k] / balance.weights[species];
			if (leaks) throughput[species] = amount;
			else {
				final[species] = amount;
				throughput[species] = amount === 0 ? 0 : amount > 0 ? Infinity : -Infinity;
			}
		});
		passOn(system, block, parts, throughput, arrivals);
	}
	return { final, throughput };
}

function passOn(
	system: LinearSystem,
	block: Int32Array,
	parts: Components,
	throughput: Float64Array,
	arrivals: Float64Array
): void {
	const own = parts.blockOf[block[0]];
	for (const { from, to, rate, coefficient } of system.transfers)
		if (parts.blockOf[from] === own && parts.blockOf[to] !== own && throughput[from] !== 0)
			arrivals[to] += rate * coefficient * throughput[from];
}

/** rates[i][j]: from local i to local j, in weighted amounts. */
function internalRates(system: LinearSystem, block: Int32Array, weights: Float64Array): Float64Array[] {
	const local = new Map(Array.from(block, (species, k) => [species, k]));
	const rates = Array.from(block, () => new Float64Array(block.length));
	for (const { from, to, rate, coefficient } of system.transfers) {
		const i = local.get(from);
		const j = local.get(to);
		if (i !== undefined && j !== undefined && i !== j)
			rates[i][j] += (rate * coefficient * weights[to]) / weights[from];
	}
	return rates;
}

/** Eliminates species from the last to the first; pivots[k] is the rate of leaving k for earlier species or for good. */
function eliminate(rates: Float64Array[], exits: Float64Array, arrivals: Float64Array): Float64Array {
	const pivots = new Float64Array(rates.length);
	for (let k = rates.length - 1; k >= 0; k--) {
		let pivot = exits[k];
		for (let j = 0; j < k; j++) pivot += rates[k][j];
		pivots[k] = pivot;
		for (let j = 0; j < k; j++) arrivals[j] += (arrivals[k] * rates[k][j]) / pivot;
		for (let i = 0; i < k; i++) {
			const share = rates[i][k] / pivot;
			if (share === 0) continue;
			exits[i] += share * exits[k];
			for (let j = 0; j < k; j++) if (j !== i) rates[i][j] += share * rates[k][j];
		}
	}
	return pivots;
}

function transient(rates: Float64Array[], exits: Float64Array, arrivals: Float64Array): Float64Array {
	const pivots = eliminate(rates, exits, arrivals);
	const n = new Float64Array(rates.length);
	for (let k = 0; k < n.length; k++) {
		let flow = arrivals[k];
		for (let i = 0; i < k; i++) flow += n[i] * rates[i][k];
		n[k] = flow === 0 ? 0 : flow / pivots[k];
	}
	return n;
}

function stationary(rates: Float64Array[], total: number): Float64Array {
	const m = rates.length;
	const share = new Float64Array(m);
	share[0] = 1;
	if (m > 1) {
		const pivots = eliminate(rates, new Float64Array(m), new Float64Array(m));
		for (let k = 1; k < m; k++) {
			let flow = 0;
			for (let i = 0; i < k; i++) flow += share[i] * rates[i][k];
			share[k] = flow / pivots[k];
		}
	}
	const sum = share.reduce((a, b) => a + b, 0);
	return share.map((value) => (value / sum) * total);
}

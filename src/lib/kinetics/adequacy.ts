/**
 * Is pseudo-first-order good enough? The true step, in which the reagent in excess is used up, against the first-order curve.
 *
 *     true     rate = k [A] Π [X]^m with [X] falling by ν per turnover
 *     assumed  rate = k' [A],  k' = k Π [X₀]^m
 *
 * The true equations are integrated with an embedded Runge–Kutta pair (`dormand-prince.ts`); the largest difference of any
 * species, as a share of the charge, is reported with where and when it occurs.
 *
 * | symbol | name here |
 * | --- | --- |
 * | m | order of the species in excess in the rate law |
 * | ν | `consumed`, 1 per turnover where left out |
 */
import { integrate } from './dormand-prince';
import { linearSystem } from './linear-system';
import { rateConstants } from './rate-laws';
import { solve } from './solve';
import type { Conditions, Network, RateLaw } from './types';

export interface AdequacyOptions {
	/** mol of each species in excess used per turnover of a step that names it: 0 for a catalyst; 1 where left out. */
	consumed?: Readonly<Record<string, number>>;
	/** Times compared, 200 where left out. */
	points?: number;
}

export interface Adequacy {
	/** Largest difference of any species, % of the total charge. */
	largestPercentOfCharge: number;
	species: string;
	timeS: number;
	/** Of that species then: first-order curve and true curve, mol/L. */
	firstOrder: number;
	true: number;
	/** Equivalents of each species in excess over the total charge. */
	equivalents: Record<string, number>;
	/** Share of each species in excess that is used up at the end, %. */
	usedPercent: Record<string, number>;
}

/**
 * Compares both over [0, endS].
 * @param charge mol/L of the species of the scheme, in species order
 * @throws RangeError when a concentration in excess is missing, or the true equations are too stiff to integrate
 */
export function pseudoFirstOrderAdequacy(
	network: Network,
	conditions: Conditions,
	charge: ArrayLike<number>,
	endS: number,
	options: AdequacyOptions = {}
): Adequacy {
	if (!(endS > 0 && Number.isFinite(endS)))
		throw new RangeError(`A time above 0 s to compare up to is expected; found ${endS} s.`);
	const n = network.species.length;
	const points = options.points ?? 200;
	const times = Float64Array.from({ length: points }, (_, k) => (endS * (k + 1)) / points);
	const constants = rateConstants(network, conditions);
	const assumed = solve(linearSystem(network, constants), charge).curves(times);
	const reagents = excessSpecies(network);
	const start = new Float64Array(n + reagents.length);
	for (let i = 0; i < n; i++) start[i] = charge[i];
	reagents.forEach((id, x) => (start[n + x] = conditions.excessMolPerL[id]));
	const f = trueRates(network, constants, conditions, reagents, options.consumed ?? {});
	const real = integrate(f, start, times, { relative: 1e-10, absolute: 1e-13 });
	const total = Array.from(charge).reduce((sum, c) => sum + c, 0);
	let worst = { difference: -1, k: 0, i: 0 };
	const width = start.length;
	for (let k = 0; k < points; k++)
		for (let i = 0; i < n; i++) {
			const difference = Math.abs(assumed[k * n + i] - real[k * width + i]);
			if (difference > worst.difference) worst = { difference, k, i };
		}
	const last = (points - 1) * width + n;
	return {
		largestPercentOfCharge: (100 * worst.difference) / total,
		species: network.species[worst.i].id,
		timeS: times[worst.k],
		firstOrder: assumed[worst.k * n + worst.i],
		true: real[worst.k * width + worst.i],
		equivalents: Object.fromEntries(reagents.map((id, x) => [id, start[n + x] / total])),
		usedPercent: Object.fromEntries(reagents.map((id, x) => [id, 100 * (1 - real[last + x] / start[n + x])]))
	};
}

function excessSpecies(network: Network): string[] {
	const ids = network.steps.flatMap(({ forward, reverse }) => [
		...forward.excess.map((e) => e.species),
		...(reverse && reverse.form !== 'equilibrium' ? reverse.excess.map((e) => e.species) : [])
	]);
	return [...new Set(ids)];
}

function trueRates(
	network: Network,
	constants: { forward: Float64Array; reverse: Float64Array },
	conditions: Conditions,
	reagents: string[],
	consumed: Readonly<Record<string, number>>
) {
	const n = network.species.length;
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const law = (value: RateLaw | null) => {
		const excess = (value?.excess ?? []).map(({ species, order }) => ({
			at: n + reagents.indexOf(species),
			order,
			start: conditions.excessMolPerL[species],
			used: consumed[species] ?? 1
		}));
		return excess;
	};
	const steps = network.steps.map((step, j) => ({
		reactant: index.get(step.reactant)!,
		products: step.products.map((p) => ({ at: index.get(p.species)!, coefficient: p.coefficient })),
		forward: constants.forward[j],
		reverse: constants.reverse[j],
		excess: law(step.forward),
		reverseExcess: law(
			step.reverse && step.reverse.form !== 'equilibrium' ? step.reverse : step.reverse && step.forward
		)
	}));
	const scaled = (excess: (typeof steps)[number]['excess'], y: Float64Array) => {
		let factor = 1;
		for (const { at, order, start } of excess) factor *= (Math.max(y[at], 0) / start) ** order;
		return factor;
	};
	return (_t: number, y: Float64Array, out: Float64Array): void => {
		out.fill(0);
		for (const step of steps) {
			const forward = step.forward * scaled(step.excess, y) * y[step.reactant];
			const back = step.products[0]
				? step.reverse * scaled(step.reverseExcess, y) * y[step.products[0].at]
				: 0;
			const net = forward - back;
			out[step.reactant] -= net;
			for (const { at, coefficient } of step.products) out[at] += coefficient * net;
			for (const { at, used } of step.excess) out[at] -= used * net;
		}
	};
}

/**
 * By how much a first-order constant fitted to A + N → P comes out low when N is used up, as a share of k' at the start.
 * Least squares of e^{−kt} on the exact second-order curve at evenly spaced times up to `timeConstants`/k'.
 * @param equivalents of N over A, above 1
 */
export function apparentConstantBias(equivalents: number, timeConstants = 3, points = 50): number {
	if (!(equivalents > 1)) throw new RangeError(`More than one equivalent is expected; found ${equivalents}.`);
	const times = Array.from({ length: points }, (_, k) => (timeConstants * k) / (points - 1));
	const excess = equivalents - 1;
	const curve = times.map((t) => {
		const decay = Math.exp((-excess * t) / equivalents);
		return (excess * decay) / (equivalents - decay);
	});
	let k = 1;
	for (let round = 0; round < 50; round++) {
		let top = 0;
		let bottom = 0;
		times.forEach((t, m) => {
			const slope = -t * Math.exp(-k * t);
			top += slope * (curve[m] - Math.exp(-k * t));
			bottom += slope * slope;
		});
		k += top / bottom;
		if (Math.abs(top / bottom) < 1e-13) break;
	}
	return 1 - k;
}

/**
 * Largest error of the engine over random networks, family by family, against extended precision.
 */
import { ExtendedPropagator } from '../extended';
import { solve } from '../solve';
import type { SolveMethod } from '../types';
import { randomCase, type Family } from './families';

export interface FamilyAccuracy {
	family: Family;
	networks: number;
	/** Largest |error| of any species at any time, as a fraction of the total charge, and the seed that showed it. */
	worst: number;
	worstSeed: number;
	/** Largest relative error of any concentration above 1e-30 of the charge. */
	worstRelative: number;
	worstRelativeSeed: number;
	/** Most negative concentration, as a fraction of the charge. */
	lowest: number;
	/** Count of values that are not finite numbers. */
	broken: number;
	/** Largest error over the solution's own estimate. */
	overEstimate: number;
	methods: Partial<Record<SolveMethod, number>>;
}

/** Seeds first … first + count − 1 of one family. */
export function familyAccuracy(family: Family, first: number, count: number): FamilyAccuracy {
	const result: FamilyAccuracy = {
		family,
		networks: 0,
		worst: 0,
		worstSeed: first,
		worstRelative: 0,
		worstRelativeSeed: first,
		lowest: 0,
		broken: 0,
		overEstimate: 0,
		methods: {}
	};
	for (let seed = first; seed < first + count; seed++) addCase(result, family, seed);
	return result;
}

function addCase(result: FamilyAccuracy, family: Family, seed: number): void {
	const { system, charge, timesS } = randomCase(family, seed);
	const reference = new ExtendedPropagator(system);
	const solution = solve(system, charge);
	const total = charge.reduce((sum, value) => sum + value, 0);
	let own = 0;
	for (const timeS of timesS) {
		const truth = reference.apply(timeS, charge);
		const got = solution.at(timeS);
		for (let i = 0; i < system.n; i++) {
			const error = Math.abs(got[i] - truth[i]);
			if (!Number.isFinite(got[i])) result.broken++;
			own = Math.max(own, error / total);
			result.lowest = Math.min(result.lowest, got[i] / total);
			if (truth[i] > 1e-30 * total && error / truth[i] > result.worstRelative) {
				result.worstRelative = error / truth[i];
				result.worstRelativeSeed = seed;
			}
		}
	}
	if (own > result.worst) {
		result.worst = own;
		result.worstSeed = seed;
	}
	result.overEstimate = Math.max(result.overEstimate, own / solution.errorEstimate);
	result.methods[solution.method] = (result.methods[solution.method] ?? 0) + 1;
	result.networks++;
}

/**
 * Seeded draws from the joint distribution of a fit's estimates.
 *
 * Problem: intervals of times and values that depend on several correlated constants, in a curved way.
 *
 *     x = x̂ + L z √(ν/χ²_ν),   L Lᵀ = covariance           (multivariate t with ν degrees of freedom)
 *     z from scrambled Halton points through the normal quantile, χ²_ν from one more coordinate
 *
 * so that each constant alone has the interval that is printed with the fit, estimate ± t SE: a constant whose covariance is
 * on the ln scale varies as k̂ (1 + x − x̂) while its relative standard error is at most 20 %, and as k̂ e^{x − x̂} beyond,
 * where estimate ± t SE would reach zero. Low-discrepancy points make quantiles of 2 000 draws as good as those of some
 * 50 000 random ones.
 *
 * | symbol | name here |
 * | --- | --- |
 * | L | `factor`, row arrays |
 * | ν | `degreesOfFreedom` |
 *
 * Sources: S. Kotz and S. Nadarajah, Multivariate t Distributions and Their Applications (2004), 1.1; J. H. Halton, Numer.
 * Math. 2 (1960) 84.
 */
import { chiSquareQuantile, normalQuantile } from '../fit/distributions';
import { cholesky } from '../fit/positive-definite';
import { haltonSequence } from '../fit/sequence';
import type { NetworkParameter } from './parameters';

/** Largest relative standard error up to which a constant varies on its natural scale. */
export const NATURAL_SCALE_LIMIT = 0.2;

export interface Draws {
	count: number;
	parameters: number;
	/** Deviations on the scale of estimation, draw by draw: deviations[d·parameters + j]. */
	deviations: Float64Array;
}

/** Covariance of the varied parameters alone; null when it is not positive definite to rounding. */
export function jointFactor(
	parameters: readonly NetworkParameter[],
	covariance: readonly (readonly number[])[]
): number[][] | null {
	// Scaled to correlations first, so that 1/s and J/mol do not spoil each other.
	const correlation = parameters.map((a) =>
		parameters.map((b) => (a === b ? 1 + 1e-12 : covariance[a.fitted][b.fitted] / (a.error * b.error)))
	);
	const factor = cholesky(correlation);
	return factor && factor.map((row, i) => row.map((value) => value * parameters[i].error));
}

/** The same seed gives the same draws, bit by bit. `degreesOfFreedom` ≤ 0 or infinite: the normal distribution. */
export function jointDraws(factor: number[][], degreesOfFreedom: number, count: number, seed: number): Draws {
	const p = factor.length;
	const points = haltonSequence(p + 1, seed);
	const deviations = new Float64Array(count * p);
	const z = new Float64Array(p);
	const student = degreesOfFreedom > 0 && Number.isFinite(degreesOfFreedom);
	const shift = seededShift(p + 1, seed);
	for (let d = 0; d < count; d++) {
		const u = points(d + 1);
		for (let j = 0; j < p; j++) z[j] = normalQuantile(inside(u[j] + shift[j]));
		const chi = student ? chiSquareQuantile(inside(u[p] + shift[p]), degreesOfFreedom) : 1;
		const stretch = student ? Math.sqrt(degreesOfFreedom / chi) : 1;
		for (let j = 0; j < p; j++) {
			let sum = 0;
			for (let k = 0; k <= j; k++) sum += factor[j][k] * z[k];
			deviations[d * p + j] = sum * stretch;
		}
	}
	return { count, parameters: p, deviations };
}

/** Cranley–Patterson rotation: without it base 2, whose only permutation is the identity, ignores the seed. */
function seededShift(dimensions: number, seed: number): Float64Array {
	const next = haltonSequence(dimensions, seed ^ 0x5bd1e995);
	return next(1 + (seed % 100_003));
}

function inside(u: number): number {
	const wrapped = u - Math.floor(u);
	return Math.min(1 - 1e-12, Math.max(1e-12, wrapped));
}

/** Value of a parameter at a deviation on the scale of estimation; NaN where it would not be a usable constant. */
export function valueAt(parameter: NetworkParameter, deviation: number): number {
	if (parameter.scale === 'linear') return parameter.estimate + deviation;
	if (parameter.error > NATURAL_SCALE_LIMIT) return parameter.estimate * Math.exp(deviation);
	const factor = 1 + deviation;
	return factor > 0 ? parameter.estimate * factor : NaN;
}

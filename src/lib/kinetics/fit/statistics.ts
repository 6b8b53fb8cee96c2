/**
 * Figures of a finished fit: s, information criteria, leverage and studentised residuals, runs test, autocorrelation,
 * lack of fit.
 *
 *     s² = SSR/(n − p);  AICc = n ln(SSR/n) + 2q + 2q(q+1)/(n − q − 1);  BIC = n ln(SSR/n) + q ln n;  q = p + 1
 *     studentised = e/(σ s √(1 − h));  F = [(SSR − SSPE)/(n − p − df_PE)]/[SSPE/df_PE]
 *
 * q counts the variance. n counts values, not limits.
 *
 * Sources: Burnham & Anderson, Model Selection and Multimodel Inference (2002) 2.4; Draper & Smith, Applied Regression
 * Analysis, 2.1 (lack of fit) and 7.4 (runs); Wald & Wolfowitz, Ann. Math. Stat. 11 (1940) 147; Cook & Weisberg, Residuals and
 * Influence in Regression (1982) 2.2.
 */
import type { FitReport } from '../../schemas/fit';
import { fQuantile, fUpper, normalCdf } from './distributions';
import type { Point } from './points';
import type { KineticProblem } from './problem';
import { replicateGroups } from './replicates';

/** AICc, or null where n is too small for it. */
export function aicc(n: number, p: number, ssr: number): number | null {
	const q = p + 1;
	if (n - q - 1 <= 0 || !(ssr > 0)) return null;
	return n * Math.log(ssr / n) + 2 * q + (2 * q * (q + 1)) / (n - q - 1);
}

export function bic(n: number, p: number, ssr: number): number | null {
	if (n <= p || !(ssr > 0)) return null;
	return n * Math.log(ssr / n) + (p + 1) * Math.log(n);
}

/** Series of weighted residuals (prediction − observation)/σ in time order, one for each run and channel. */
export function residualSeries(problem: KineticProblem, residuals: ArrayLike<number>): number[][] {
	const series = new Map<string, { time: number; value: number }[]>();
	problem.points.forEach((point, i) => {
		if (point.kind !== 'value') return;
		const key = `${point.run}|${point.channel}`;
		const list = series.get(key) ?? [];
		list.push({ time: point.time, value: residuals[i] });
		series.set(key, list);
	});
	return [...series.values()].map((list) => list.sort((a, b) => a.time - b.time).map((e) => e.value));
}

/** Wald–Wolfowitz runs test on the signs, pooled over series; null where there is too little to test. */
export function runsTest(series: number[][]): FitReport['runsTest'] {
	let observed = 0;
	let expected = 0;
	let variance = 0;
	for (const list of series) {
		const signs = list.filter((v) => v !== 0).map((v) => v > 0);
		const plus = signs.filter(Boolean).length;
		const minus = signs.length - plus;
		const n = plus + minus;
		if (n < 2 || plus === 0 || minus === 0) {
			if (n < 5) continue;
			// All of one sign: the most extreme case, one run where about n/2 are expected.
			observed += 1;
			expected += n / 2 + 1;
			variance += (n - 2) / 4;
			continue;
		}
		observed += 1 + signs.slice(1).filter((s, i) => s !== signs[i]).length;
		expected += (2 * plus * minus) / n + 1;
		variance += (2 * plus * minus * (2 * plus * minus - n)) / (n * n * (n - 1));
	}
	if (!(variance > 0)) return null;
	const z = (observed - expected) / Math.sqrt(variance);
	return { z, p: 2 * normalCdf(-Math.abs(z)) };
}

/** Lag-1 autocorrelation of the residuals, pooled within series. */
export function lagOne(series: number[][]): number | null {
	let products = 0;
	let squares = 0;
	for (const list of series) {
		for (let i = 0; i < list.length; i++) {
			squares += list[i] * list[i];
			if (i > 0) products += list[i] * list[i - 1];
		}
	}
	return squares > 0 ? products / squares : null;
}

/** Lack of fit against separate samples of the same thing; null where there are none. */
export function lackOfFit(
	problem: KineticProblem,
	ssr: number,
	counted: number,
	confidence: number
): FitReport['lackOfFit'] {
	const groups = replicateGroups(problem.request, problem.runs);
	let ss = 0;
	let df2 = 0;
	for (const group of groups) {
		const weights = group.map((p) => 1 / p.sigma ** 2);
		const total = weights.reduce((a, b) => a + b, 0);
		const mean = group.reduce((a, p, i) => a + weights[i] * p.observed, 0) / total;
		ss += group.reduce((a, p, i) => a + weights[i] * (p.observed - mean) ** 2, 0);
		df2 += group.length - 1;
	}
	const df1 = counted - problem.free.length - df2;
	if (df2 < 1 || df1 < 1 || !(ss > 0)) return null;
	const f = Math.max(0, ssr - ss) / df1 / (ss / df2);
	return { f, df1, df2, p: fUpper(f, df1, df2), critical: fQuantile(confidence, df1, df2) };
}

/** One entry of the result's residual list for every point. */
export function residualRows(
	problem: KineticProblem,
	predictions: ArrayLike<number>,
	leverage: ArrayLike<number>,
	s: number | null
): FitReport['residuals'] {
	return problem.points.map((point, i) => {
		const run = problem.runs[point.run];
		const residual = point.kind === 'value' ? point.observed - predictions[i] : null;
		const h = Math.min(leverage[i], 1);
		return {
			run: run.id,
			channel: run.channels[point.channel].id,
			index: point.index,
			time: run.timesS[point.time] / run.timeFactor,
			timeUnit: run.timeUnit,
			...observation(point),
			predicted: predictions[i],
			residual,
			sigma: point.sigma,
			studentised:
				residual === null || s === null || !(s > 0) || h > 1 - 1e-9
					? null
					: residual / (point.sigma * s * Math.sqrt(1 - h)),
			leverage: point.kind === 'value' ? h : null
		};
	});
}

function observation(point: Point): { observed: number | null; below?: number; above?: number } {
	if (point.kind === 'value') return { observed: point.observed };
	return point.kind === 'below'
		? { observed: null, below: point.observed }
		: { observed: null, above: point.observed };
}

/**
 * Which parameters enter the predictions linearly, so that they can be found by linear least squares instead of by search.
 *
 * The curves are linear in the charges and the signals in the response factors, but their product is not: a response factor is
 * eliminated first, and a charge only where no eliminated factor multiplies what it feeds. Nothing is eliminated where a limit counts
 * (its residual bends) or where area % is assayed (a quotient). The weights are those of the values observed, so that they do not bend
 * the problem either.
 */
import type { KineticProblem } from './problem';
import type { RunModel } from './run-model';
import type { SearchBox } from './starts';

export interface Elimination {
	/** Positions among the estimated parameters; empty where nothing is eliminated. */
	linear: number[];
	/** Why none, or not all that enter linearly; null where there is nothing to say. */
	note: string | null;
}

const none = (note: string | null): Elimination => ({ linear: [], note });

export function eliminationOf(problem: KineticProblem, box: SearchBox): Elimination {
	const { free, runs } = problem;
	const candidates = free.flatMap((s, j) => (s.kind === 'response' || s.kind === 'amount' ? [j] : []));
	if (candidates.length === 0) return none(null);
	if (problem.request.options.variableProjection === false) return none('Elimination was switched off.');
	if (problem.censored > 0)
		return none(
			`Nothing was eliminated: ${problem.censored} value${problem.censored === 1 ? ' is a limit' : 's are limits'}, which the curve may pass freely on one side.`
		);
	const mayVary = candidates.filter((j) => box.lower[j] < box.upper[j]);
	const factors = mayVary.filter((j) => free[j].kind === 'response' && runs.every((r) => linearFactor(r, j)));
	const charges = mayVary.filter(
		(j) => free[j].kind === 'amount' && runs.every((r) => linearCharge(r, j, factors))
	);
	const linear = [...factors, ...charges].sort((a, b) => a - b);
	// Without a parameter to search for, or a value to spare, there is nothing to project.
	if (linear.length === free.length || linear.length >= problem.points.length) return none(null);
	const kept = mayVary.filter((j) => !linear.includes(j));
	return {
		linear,
		note: kept.length
			? `${kept.map((j) => free[j].id).join(', ')} ${kept.length === 1 ? 'was' : 'were'} searched for like the constants: ${kept.length === 1 ? 'it multiplies' : 'they multiply'} an eliminated response factor, or area % ${kept.length === 1 ? 'depends' : 'depend'} on ${kept.length === 1 ? 'it' : 'them'}.`
			: null
	};
}

const used = (run: RunModel) => new Set(run.points.map((p) => p.channel));
const sharesArea = (run: RunModel): boolean => [...used(run)].some((c) => run.channels[c].areaPercent);

function linearFactor(run: RunModel, j: number): boolean {
	const acts = run.channels.some((c) => c.lnResponse.terms.some((t) => t.free === j));
	if (!acts) return true;
	// On the logarithm a tie only adds a constant: the factor itself stays a factor.
	return (
		!sharesArea(run) &&
		run.channels.every((c) => c.lnResponse.terms.every((t) => t.free !== j || t.coefficient === 1))
	);
}

function linearCharge(run: RunModel, j: number, factors: number[]): boolean {
	if (!run.charge.some((c) => c.terms.some((t) => t.free === j))) return true;
	if (sharesArea(run)) return false;
	return [...used(run)].every((c) => !run.channels[c].lnResponse.terms.some((t) => factors.includes(t.free)));
}

/**
 * For every point the eliminated parameter that its whole prediction is proportional to; null where some prediction is a sum of
 * several parts (then derivatives have to be computed again after the linear step).
 */
export function proportionalTo(problem: KineticProblem, linear: number[]): Int32Array | null {
	const out = new Int32Array(problem.points.length).fill(-1);
	for (let i = 0; i < out.length; i++) {
		const { run, channel } = problem.points[i];
		const model = problem.runs[run];
		const factor = model.channels[channel].lnResponse.terms.find((t) => linear.includes(t.free));
		const charged = model.charge.filter((c) => c.constant !== 0 || c.terms.length > 0);
		const own = new Set(charged.flatMap((c) => c.terms.map((t) => t.free)).filter((f) => linear.includes(f)));
		if (factor) {
			if (own.size > 0) return null;
			out[i] = factor.free;
		} else if (own.size > 0) {
			const only =
				own.size === 1 && charged.every((c) => c.constant === 0 && c.terms.every((t) => own.has(t.free)));
			if (!only) return null;
			out[i] = [...own][0];
		}
	}
	return out;
}

/**
 * First-order sensitivities of a dosed batch to its constants, its charge and every entry of its plan, analytic.
 *
 *     constant       s' = K s + (∂K/∂ln k) n                       (`sensitivity.ts`, piece by piece)
 *     feed rate f_i  s' = K s + e_i while the feed runs
 *     feed start     s jumps by −f,   feed end   s jumps by +f
 *     shot amount    s jumps by e_i,  shot time  s jumps by −K Δ     (Δ: the shot; what it would have done by then is missing)
 *     volume         ∂V: +1 a litre, the time run for a rate, ∓ the rate for start and end
 *     concentration  ∂(n/V) = (∂n − c ∂V)/V
 *
 * An event at the very start is moved to later times (one-sided). Between events s obeys dn/dt = K n, so it is carried by the
 * same closed form as the amounts.
 *
 * | symbol | name here |
 * | --- | --- |
 * | s = ∂n/∂θ | `amounts`, mol per unit |
 * | ∂V/∂θ | `litres` |
 * | K Δ | `flowFrom` |
 *
 * Source: sensitivities across events, D. B. Ozyurt and P. I. Barton, SIAM J. Sci. Comput. 26 (2005) 1725; block matrix, C. F.
 * Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import { withFeed } from './augmented';
import type { DosingPiece, DosingSolution } from './dosing';
import { Propagator } from './propagator';
import { sensitivities, type SensitivityParameter } from './sensitivity';
import type { LinearSystem } from './types';

export type DosingParameter =
	/** ln k of a step-direction, or mol in the vessel at t = 0. */
	| SensitivityParameter
	/** mol/s of one species in one feed. */
	| { kind: 'feed rate'; feed: number; species: number }
	/** L/s of one feed. */
	| { kind: 'feed volume'; feed: number }
	/** When a feed begins or ends, s. */
	| { kind: 'feed start' | 'feed end'; feed: number }
	/** mol of one species in one shot. */
	| { kind: 'shot amount'; shot: number; species: number }
	/** L of one shot. */
	| { kind: 'shot volume'; shot: number }
	/** When a shot is given, s. */
	| { kind: 'shot time'; shot: number }
	/** L in the vessel at t = 0. */
	| { kind: 'start volume' };

export interface DosingSensitivities {
	/** ∂n_i/∂θ_p, mol per unit: [p·n + i]. */
	amounts: Float64Array;
	/** ∂V/∂θ_p, L per unit. */
	litres: Float64Array;
	/** ∂c_i/∂θ_p, mol/L per unit: [p·n + i]. */
	concentrations: Float64Array;
}

/**
 * Derivatives at one time. An event at exactly that time counts as over.
 * @throws RangeError when a parameter names a feed, shot or species that is not there
 */
export function dosingSensitivities(
	solution: DosingSolution,
	timeS: number,
	parameters: readonly DosingParameter[]
): DosingSensitivities {
	const { n } = solution;
	parameters.forEach((parameter) => check(solution, parameter));
	const amounts = new Float64Array(parameters.length * n);
	const litres = Float64Array.from(parameters, (parameter) => volumeEffect(solution, timeS, parameter));
	const concentrations = new Float64Array(parameters.length * n);
	const volume = solution.volumeAt(timeS);
	const c = solution.at(timeS);
	walk(solution, timeS, parameters).forEach((s, p) => {
		for (let i = 0; i < n; i++) {
			amounts[p * n + i] = s[i];
			concentrations[p * n + i] = (s[i] - c[i] * litres[p]) / volume;
		}
	});
	return { amounts, litres, concentrations };
}

/** ∂n/∂θ through the pieces; one array of n + 1 a parameter, the source's place last. */
function walk(
	solution: DosingSolution,
	timeS: number,
	parameters: readonly DosingParameter[]
): Float64Array[] {
	const { n, pieces, system } = solution;
	const plain = new Propagator(system);
	const states = parameters.map((parameter): Float64Array => {
		const s = new Float64Array(n);
		if (parameter.kind === 'charge') s[parameter.species] = 1;
		return s;
	});
	for (let k = 0; k < pieces.length && pieces[k].startS <= timeS; k++) {
		const piece = pieces[k];
		parameters.forEach((parameter, p) => jump(solution, parameter, piece.startS, states[p]));
		const h = Math.min(timeS, pieces[k + 1]?.startS ?? Infinity) - piece.startS;
		if (h <= 0) continue;
		const byRate = rateDerivatives(piece, h, parameters);
		let r = 0;
		parameters.forEach((parameter, p) => {
			const moved = moveOn(solution, plain, piece, h, parameter, states[p]);
			if (parameter.kind === 'rate') {
				for (let i = 0; i < n; i++) moved[i] += byRate[r * (n + 1) + i];
				r++;
			}
			states[p] = moved;
		});
	}
	return states;
}

function rateDerivatives(
	piece: DosingPiece,
	h: number,
	parameters: readonly DosingParameter[]
): Float64Array {
	const rates = parameters.filter((p) => p.kind === 'rate');
	return rates.length > 0
		? sensitivities(piece.system, piece.start, [h], rates).derivatives
		: new Float64Array(0);
}

/** What is there is carried on; a feed rate adds what one more mol/s has become. */
function moveOn(
	{ n, system, plan }: DosingSolution,
	plain: Propagator,
	piece: DosingPiece,
	h: number,
	parameter: DosingParameter,
	state: Float64Array
): Float64Array {
	const moved = plain.apply(h, state);
	if (parameter.kind !== 'feed rate') return moved;
	const { startS, endS } = plan.feeds[parameter.feed];
	if (!(startS <= piece.startS && piece.startS < endS)) return moved;
	const unit = new Float64Array(n);
	unit[parameter.species] = 1;
	const source = new Float64Array(n + 1);
	source[n] = 1;
	const gained = new Propagator(withFeed(system, unit)).apply(h, source);
	for (let i = 0; i < n; i++) moved[i] += gained[i];
	return moved;
}

/** What an event at this time does to ∂n/∂θ. */
function jump(
	{ n, system, plan }: DosingSolution,
	parameter: DosingParameter,
	timeS: number,
	s: Float64Array
): void {
	const add = (amounts: ArrayLike<number>, sign: number) => {
		for (let i = 0; i < n; i++) s[i] += sign * amounts[i];
	};
	switch (parameter.kind) {
		case 'feed start':
			if (plan.feeds[parameter.feed].startS === timeS) add(plan.feeds[parameter.feed].molPerS, -1);
			break;
		case 'feed end':
			if (plan.feeds[parameter.feed].endS === timeS) add(plan.feeds[parameter.feed].molPerS, 1);
			break;
		case 'shot amount':
			if (plan.shots[parameter.shot].timeS === timeS) s[parameter.species] += 1;
			break;
		case 'shot time':
			if (plan.shots[parameter.shot].timeS === timeS)
				add(flowFrom(system, plan.shots[parameter.shot].mol), -1);
	}
}

/** K Δ. */
function flowFrom({ n, outflow, transfers }: LinearSystem, amounts: ArrayLike<number>): Float64Array {
	const flow = Float64Array.from({ length: n }, (_, i) => -outflow[i] * amounts[i]);
	for (const { from, to, rate, coefficient } of transfers) flow[to] += rate * coefficient * amounts[from];
	return flow;
}

function volumeEffect({ plan }: DosingSolution, timeS: number, parameter: DosingParameter): number {
	switch (parameter.kind) {
		case 'start volume':
			return 1;
		case 'shot volume':
			return plan.shots[parameter.shot].timeS <= timeS ? 1 : 0;
		case 'feed volume': {
			const { startS, endS } = plan.feeds[parameter.feed];
			return Math.max(0, Math.min(endS, timeS) - startS);
		}
		case 'feed start': {
			const { startS, litresPerS } = plan.feeds[parameter.feed];
			return startS <= timeS ? -litresPerS : 0;
		}
		case 'feed end': {
			const { endS, litresPerS } = plan.feeds[parameter.feed];
			return endS <= timeS ? litresPerS : 0;
		}
		default:
			return 0;
	}
}

function check({ plan, n }: DosingSolution, parameter: DosingParameter): void {
	if ('feed' in parameter && !plan.feeds[parameter.feed])
		throw new RangeError(`Feed ${parameter.feed + 1} is not in the plan, which has ${plan.feeds.length}.`);
	if ('shot' in parameter && !plan.shots[parameter.shot])
		throw new RangeError(`Shot ${parameter.shot + 1} is not in the plan, which has ${plan.shots.length}.`);
	if ('species' in parameter && !(parameter.species >= 0 && parameter.species < n))
		throw new RangeError(`Species ${parameter.species + 1} is not in the scheme, which has ${n}.`);
}

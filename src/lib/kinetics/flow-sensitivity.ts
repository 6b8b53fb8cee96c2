/**
 * First-order sensitivities of plug flow and of tanks in series, analytic.
 *
 *     plug flow   ∂c/∂θ of a batch at t = τ                                   (`sensitivity.ts`)
 *     one tank    M = (I − τK)⁻¹ is what a batch with washout has collected:  d/dt (c, z) = ((K − I/τ) c, c/τ),  M c₀ = z(∞);
 *                 ∂M c₀/∂ln k follows like any other derivative of a batch, at a time by which all is washed out
 *     N tanks     s ← M s + (∂M/∂θ) c,  c ← M c
 *     residence   τ and the constants enter as products alone:  ∂c/∂τ = (1/τ) Σ_d ∂c/∂ln k_d,  K c₀ at τ = 0
 *
 * The number of tanks is a whole number and is not differentiated by.
 *
 * | symbol | name here |
 * | --- | --- |
 * | z | species n … 2n − 1 of `withOutlets` |
 * | s | `states` |
 *
 * Sources: C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395 (derivatives by an augmented system); O. Levenspiel,
 * Chemical Reaction Engineering, 3rd ed. (1999), ch. 5, 6 and 14.
 */
import { checkCount, checkResidence, throughTank, withWashout } from './flow';
import { innerParameters } from './parameter-sensitivity';
import { Propagator } from './propagator';
import { sensitivities, type SensitivityParameter } from './sensitivity';
import type { LinearSystem } from './types';

export type FlowParameter =
	/** ln k of a step-direction, or mol/L of a species in the feed. */
	| SensitivityParameter
	/** Residence time over the whole, s. */
	| { kind: 'residence' };

/** Washing out for this many residence times leaves e⁻⁶⁰ = 1e-26. */
const WASHED_OUT = 60;

/** ∂c/∂θ at the outlet of a plug-flow reactor, mol/L per unit: out[p·n + i]. */
export function plugFlowSensitivities(
	system: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	parameters: readonly FlowParameter[]
): Float64Array {
	checkResidence(residenceS);
	const inner = innerParameters(system);
	const { derivatives } = sensitivities(system, feed, [residenceS], inner);
	return gather(system, feed, residenceS, parameters, inner, derivatives);
}

/** ∂c/∂θ at the outlet of `count` equal tanks with `residenceS` over all of them, mol/L per unit: out[p·n + i]. */
export function tankSensitivities(
	system: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	count: number,
	parameters: readonly FlowParameter[]
): Float64Array {
	checkResidence(residenceS);
	checkCount(count);
	const { n } = system;
	const inner = innerParameters(system);
	const states = inner.map((parameter): Float64Array => {
		const s = new Float64Array(n);
		if (parameter.kind === 'charge') s[parameter.species] = 1;
		return s;
	});
	if (residenceS > 0) {
		const each = residenceS / count;
		const washed = withWashout(system, each);
		const wide = withOutlets(system, washed, each);
		const rates = inner.filter((parameter) => parameter.kind === 'rate');
		const collected = new Propagator(wide);
		let c = Float64Array.from(feed);
		for (let k = 0; k < count; k++) {
			const start = new Float64Array(2 * n);
			start.set(c);
			const { derivatives } = sensitivities(wide, start, [WASHED_OUT * each], rates);
			states.forEach((s, p) => {
				const moved = signedThrough(washed, each, s);
				if (p < rates.length) for (let i = 0; i < n; i++) moved[i] += derivatives[(2 * p + 1) * n + i];
				s.set(moved);
			});
			c = collected.apply(WASHED_OUT * each, start).slice(n);
		}
	}
	const derivatives = new Float64Array(inner.length * n);
	states.forEach((s, p) => derivatives.set(s, p * n));
	return gather(system, feed, residenceS, parameters, inner, derivatives);
}

/** (I − τK)⁻¹ s for an s of either sign, its two parts apart. */
function signedThrough(washed: LinearSystem, tau: number, s: Float64Array): Float64Array {
	const gain = throughTank(
		washed,
		tau,
		s.map((value) => Math.max(value, 0))
	);
	const loss = throughTank(
		washed,
		tau,
		s.map((value) => Math.max(-value, 0))
	);
	return gain.map((value, i) => value - loss[i]);
}

/** The system with washout, and n collectors that gather what leaves by it. */
function withOutlets({ n, transfers, flows }: LinearSystem, washed: LinearSystem, tau: number): LinearSystem {
	const outflow = new Float64Array(2 * n);
	outflow.set(washed.outflow);
	const leaving = Array.from({ length: n }, (_, i) => ({
		from: i,
		to: n + i,
		rate: 1 / tau,
		coefficient: 1,
		// A step of its own for each, so that no two of them count as one.
		step: OUTLET + i,
		direction: 'forward' as const
	}));
	return { n: 2 * n, outflow, transfers: [...transfers, ...leaving], flows: [...(flows ?? []), ...leaving] };
}

/** Added to the number of a species to number the step by which it leaves. */
const OUTLET = 1e6;

/** From derivatives by every inner parameter to those asked for. */
function gather(
	system: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	parameters: readonly FlowParameter[],
	inner: readonly SensitivityParameter[],
	derivatives: Float64Array
): Float64Array {
	const { n } = system;
	const out = new Float64Array(parameters.length * n);
	parameters.forEach((parameter, p) => {
		const own = out.subarray(p * n, (p + 1) * n);
		if (parameter.kind === 'residence') byResidence(system, feed, residenceS, derivatives, own);
		else {
			const at = inner.findIndex((q) => same(q, parameter));
			if (at >= 0) own.set(derivatives.subarray(at * n, (at + 1) * n));
		}
	});
	return out;
}

function byResidence(
	{ n, flows, transfers, outflow }: LinearSystem,
	feed: ArrayLike<number>,
	residenceS: number,
	derivatives: Float64Array,
	out: Float64Array
): void {
	if (residenceS === 0) {
		for (let i = 0; i < n; i++) out[i] = -outflow[i] * feed[i];
		for (const { from, to, rate, coefficient } of transfers) out[to] += rate * coefficient * feed[from];
		return;
	}
	for (let d = 0; d < (flows ?? []).length; d++)
		for (let i = 0; i < n; i++) out[i] += derivatives[d * n + i] / residenceS;
}

function same(a: SensitivityParameter, b: SensitivityParameter): boolean {
	if (a.kind === 'charge') return b.kind === 'charge' && a.species === b.species;
	return b.kind === 'rate' && a.step === b.step && a.direction === b.direction;
}

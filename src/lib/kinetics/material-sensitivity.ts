/**
 * First-order sensitivities of ∫c dt, of the gross turnover of each step-direction, and of the material map, analytic.
 *
 *     x_d = k_d ∫₀ᵗ c_from dt,   ∂x_d/∂ln k_p = δ_dp x_d + k_d ∂(∫c_from)/∂ln k_p
 *
 * with the derivative of the integral from the system with collectors (`augmented.ts`), differentiated like any other scheme.
 * For the map a counter beside each irreversible step gathers its turnover as one more product of the step itself, so that it
 * is differentiated with it; the nets of reversible steps follow from balances of the derivatives (`net-turnover.ts`). Until
 * the end means a time by which every mode has decayed below rounding.
 *
 * | symbol | name here |
 * | --- | --- |
 * | x_d | `turnover[d]`, counters of `withCounters` |
 * | θ_p | `parameters[p]` |
 *
 * Source: C. F. Van Loan, IEEE Trans. Automat. Control 23 (1978) 395.
 */
import { withCollectors } from './augmented';
import { linearSystem } from './linear-system';
import { netTurnover } from './net-turnover';
import { foldParameters, innerParameters } from './parameter-sensitivity';
import { rateConstants } from './rate-laws';
import type { FirstOrderParameter } from './rate-parameters';
import { sensitivities, type SensitivityParameter } from './sensitivity';
import { solve } from './solve';
import type { Conditions, LinearSystem, Network } from './types';

export interface IntegralSensitivities {
	/** ∫₀ᵗ c dt, mol/L·s. */
	integral: Float64Array;
	/** ∂(∫c_i dt)/∂θ_p: [p·n + i], mol/L·s per unit (ln k, or mol/L of the charge). */
	ofIntegral: Float64Array;
	/** Gross turnover of each entry of `system.flows`, mol/L. */
	turnover: Float64Array;
	/** ∂turnover_d/∂θ_p: [p·flows + d], mol/L per unit. */
	ofTurnover: Float64Array;
}

/** @throws RangeError unless the time is finite and above zero. */
export function integralSensitivities(
	system: LinearSystem,
	charge: ArrayLike<number>,
	timeS: number,
	parameters: readonly SensitivityParameter[]
): IntegralSensitivities {
	if (!(timeS > 0 && Number.isFinite(timeS)))
		throw new RangeError(`A time above 0 s is expected; found ${timeS} s.`);
	const { n } = system;
	const flows = system.flows ?? [];
	const start = new Float64Array(2 * n);
	start.set(Float64Array.from(charge));
	const found = sensitivities(withCollectors(system, timeS, 1), start, [timeS], parameters);
	const integral = found.curves.slice(n, 2 * n).map((value) => value * timeS);
	const ofIntegral = new Float64Array(parameters.length * n);
	const turnover = Float64Array.from(flows, ({ from, rate }) => rate * integral[from]);
	const ofTurnover = new Float64Array(parameters.length * flows.length);
	parameters.forEach((parameter, p) => {
		for (let i = 0; i < n; i++) ofIntegral[p * n + i] = timeS * found.derivatives[p * 2 * n + n + i];
		flows.forEach(({ step, direction, from, rate }, d) => {
			const own = parameter.kind === 'rate' && parameter.step === step && parameter.direction === direction;
			ofTurnover[p * flows.length + d] = rate * ofIntegral[p * n + from] + (own ? turnover[d] : 0);
		});
	});
	return { integral, ofIntegral, turnover, ofTurnover };
}

/**
 * ∂net_j/∂θ_p of the material map from the charge to `timeS` (Infinity: until the end), mol/L per unit: [p·steps + j].
 * NaN where the net itself cannot be told: until the end on a loop of reversible steps that never rests.
 * @throws RangeError unless the time is above zero
 */
export function materialSensitivities(
	network: Network,
	conditions: Conditions,
	charge: ArrayLike<number>,
	timeS: number,
	parameters: readonly FirstOrderParameter[]
): Float64Array {
	if (!(timeS > 0)) throw new RangeError(`A time above 0 s is expected; found ${timeS} s.`);
	const system = linearSystem(network, rateConstants(network, conditions));
	const { n } = system;
	const steps = network.steps.length;
	const reversible = network.steps.map(
		(_, j) => !!system.flows?.some((f) => f.step === j && f.direction === 'reverse')
	);
	const counted = countedFlows(network, system, reversible);
	const wide = withCounters(system, counted);
	const start = new Float64Array(wide.n);
	start.set(Float64Array.from(charge));
	const until = timeS === Infinity ? settledS(system, charge) : timeS;
	const { derivatives } = sensitivities(wide, start, [until], innerParameters(system, n));
	const folded = foldParameters(network, system, conditions, derivatives, wide.n, parameters);
	const out = new Float64Array(parameters.length * steps);
	parameters.forEach((parameter, p) => {
		const own = folded.subarray(p * wide.n, (p + 1) * wide.n);
		const gross = network.steps.map(() => ({ forward: 0, reverse: 0 }));
		counted.forEach(({ step, direction }, q) => (gross[step][direction] = own[n + q]));
		if (timeS === Infinity)
			reversible.forEach((back, j) => back && (gross[j] = { forward: Infinity, reverse: Infinity }));
		const change = own.slice(0, n);
		if (parameter.kind === 'charge') change[parameter.species] -= 1;
		out.set(netTurnover(network, gross, reversible, change), p * steps);
	});
	return out;
}

type Flow = NonNullable<LinearSystem['flows']>[number];

/** Flows whose turnover is needed: of irreversible steps, and of reversible ones that balances leave open. */
function countedFlows(network: Network, system: LinearSystem, reversible: boolean[]): Flow[] {
	const unknown = { forward: Infinity, reverse: Infinity };
	const gross = reversible.map((back) => (back ? unknown : { forward: 0, reverse: 0 }));
	const settled = netTurnover(network, gross, reversible, new Float64Array(system.n));
	return (system.flows ?? []).filter(({ step }) => !reversible[step] || Number.isNaN(settled[step]));
}

/** The system with a counter behind its species for each of the flows: one more product of that step-direction. */
function withCounters(system: LinearSystem, counted: readonly Flow[]): LinearSystem {
	const { n, transfers, flows } = system;
	const outflow = new Float64Array(n + counted.length);
	outflow.set(system.outflow);
	const counters = counted.map((flow, q) => ({ ...flow, to: n + q, coefficient: 1 }));
	return { n: n + counted.length, outflow, transfers: [...transfers, ...counters], flows };
}

/** A time by which every mode is lost in rounding, t^m of repeated ones included. */
function settledS(system: LinearSystem, charge: ArrayLike<number>): number {
	let [slowest, repeats] = [0, 1];
	const solution = solve(system, charge);
	for (const { timeConstantS, multiplicity } of solution.modes) {
		if (Number.isFinite(timeConstantS)) slowest = Math.max(slowest, timeConstantS);
		repeats = Math.max(repeats, multiplicity);
	}
	// Modes that nothing vouches for may lack a slow one.
	if (solution.method === 'uniformisation' || solution.method === 'extended')
		for (const { rate } of system.flows ?? []) slowest = Math.max(slowest, 10 / rate);
	return (50 + 10 * repeats) * slowest;
}

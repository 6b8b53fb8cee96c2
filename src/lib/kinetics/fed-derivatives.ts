/**
 * Curves and derivatives by the block triangular matrix of Van Loan, evaluated without subtraction but one: second way of
 * `sensitivity.ts`.
 *
 *     ds/dt = K s + k (Σ ν_i e_i − e_j) c_j(t),  s(0) = 0
 *
 * The system beside a copy of itself that is fed by c_j, once with the products and once with the reactant; the derivative is
 * the difference of the two. For a fast step within a component both are of the order k t, and their difference would lose as
 * many digits: there the derivative of e^{Kt} itself is squared up, its columns held to the mass that they keep
 * (`step-exponential.ts`).
 *
 * | symbol | name here |
 * | --- | --- |
 * | s | `out` |
 * | fed copies | `gain`, `loss` (`fed-system.ts`) |
 * | ∂e^{Kt}/∂ln k | `squared.l` |
 *
 * Source: C. F. Van Loan, IEEE Trans. Autom. Control 23 (1978) 395.
 */
import { components } from './components';
import { fedPropagator, flowOf, type StepFlow } from './fed-system';
import { Propagator } from './propagator';
import type { SensitivityParameter, SensitivityResult } from './sensitivity';
import type { Direction } from './step-balance';
import { StepExponential } from './step-exponential';
import type { LinearSystem } from './types';

export class FedDerivatives {
	readonly curves: Float64Array;
	readonly derivatives: Float64Array;

	/** Writes into the arrays of `result`. */
	constructor(
		readonly n: number,
		readonly timesS: Float64Array,
		readonly parameters: readonly SensitivityParameter[],
		result: SensitivityResult
	) {
		this.curves = result.curves;
		this.derivatives = result.derivatives;
	}

	evaluate(system: LinearSystem, charge: ArrayLike<number>): void {
		const { n, timesS, curves, derivatives } = this;
		const plain = new Propagator(system);
		const times = timesS.length;
		for (let k = 0; k < times; k++) plain.apply(timesS[k], charge, curves.subarray(k * n, (k + 1) * n));
		this.parameters.forEach((parameter, p) => {
			if (parameter.kind === 'rate') return this.parameterByFeeding(system, charge, p);
			const unit = new Float64Array(n);
			unit[parameter.species] = 1;
			for (let k = 0, at = p * times * n; k < times; k++, at += n)
				plain.apply(timesS[k], unit, derivatives.subarray(at, at + n));
		});
	}

	private parameterByFeeding(system: LinearSystem, charge: ArrayLike<number>, p: number): void {
		const parameter = this.parameters[p];
		const length = this.timesS.length * this.n;
		const out = this.derivatives.subarray(p * length, (p + 1) * length);
		if (parameter.kind !== 'rate') return;
		const flow = flowOf(system, parameter);
		if (!flow || !this.squaredDerivative(system, charge, parameter, flow, out))
			this.fedDerivative(system, charge, flow, out);
	}

	private fedDerivative(
		system: LinearSystem,
		charge: ArrayLike<number>,
		flow: StepFlow | null,
		out: Float64Array
	): void {
		const { n, timesS } = this;
		out.fill(0);
		if (!flow) return;
		const gain = fedPropagator(system, flow.from, flow.products);
		const loss = fedPropagator(system, flow.from, [{ to: flow.from, rate: flow.rate }]);
		const start = new Float64Array(2 * n);
		for (let i = 0; i < n; i++) start[i] = charge[i];
		const end = new Float64Array(2 * n);
		for (let k = 0; k < timesS.length; k++) {
			gain.apply(timesS[k], start, end);
			for (let i = 0; i < n; i++) out[k * n + i] = end[n + i];
			loss.apply(timesS[k], start, end);
			for (let i = 0; i < n; i++) out[k * n + i] -= end[n + i];
		}
	}

	/** The same by squaring, for a fast step within a component; false where that is not the case or cannot be done. */
	private squaredDerivative(
		system: LinearSystem,
		charge: ArrayLike<number>,
		{ step, direction }: Extract<SensitivityParameter, { kind: 'rate' }>,
		flow: StepFlow,
		out: Float64Array
	): boolean {
		const { n, timesS } = this;
		const latest = timesS.reduce((most, t) => Math.max(most, t), 0);
		if (!system.flows || !(flow.rate * latest > FAST)) return false;
		const { blockOf } = components(system);
		if (!flow.products.some(({ to }) => blockOf[to] === blockOf[flow.from])) return false;
		const { directions, constants } = directionsOf(system);
		const place = system.flows.findIndex((f) => f.step === step && f.direction === direction);
		const squared = new StepExponential(n, directions, [place]);
		if (!squared.balanced) return false;
		out.fill(0);
		for (let k = 0; k < timesS.length; k++) {
			if (timesS[k] === 0) continue;
			if (!squared.compute(constants, timesS[k])) return false;
			for (let i = 0; i < n; i++) {
				let sum = 0;
				for (let j = 0; j < n; j++) sum += squared.l[i * n + j] * charge[squared.order[j]];
				out[k * n + squared.order[i]] = sum;
			}
		}
		return true;
	}
}

/** k t beyond which the difference of gains and losses would lose more than three digits. */
const FAST = 1e3;

/** The step-directions in the order of `flows`, then what is gathered without being taken (collectors, feeds). */
function directionsOf({ flows = [], transfers }: LinearSystem): {
	directions: Direction[];
	constants: Float64Array;
} {
	const of = (t: { step: number; direction: string }) => `${t.step} ${t.direction}`;
	const known = new Set(flows.map(of));
	const steps = flows.map((flow) => ({
		from: flow.from,
		products: transfers.filter((t) => of(t) === of(flow)).map(({ to, coefficient }) => ({ to, coefficient }))
	}));
	const gathered = transfers.filter((t) => !known.has(of(t)));
	return {
		directions: [
			...steps,
			...gathered.map(({ from, to, coefficient }) => ({
				from,
				products: [
					{ to: from, coefficient: 1 },
					{ to, coefficient }
				]
			}))
		],
		constants: Float64Array.from([...flows.map((f) => f.rate), ...gathered.map((t) => t.rate)])
	};
}

/**
 * Curves and derivatives by the block triangular matrix of Van Loan, evaluated without subtraction but one: second way of
 * `sensitivity.ts`.
 *
 *     ds/dt = K s + k (Σ ν_i e_i − e_j) c_j(t),  s(0) = 0
 *
 * The system beside a copy of itself that is fed by c_j, once with the products and once with the reactant; the derivative is
 * the difference of the two.
 *
 * | symbol | name here |
 * | --- | --- |
 * | s | `out` |
 * | fed copies | `gain`, `loss` (`fed-system.ts`) |
 *
 * Source: C. F. Van Loan, IEEE Trans. Autom. Control 23 (1978) 395.
 */
import { fedPropagator, flowOf, type StepFlow } from './fed-system';
import { Propagator } from './propagator';
import type { SensitivityParameter, SensitivityResult } from './sensitivity';
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
		if (parameter.kind === 'rate') this.fedDerivative(system, charge, flowOf(system, parameter), out);
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
}

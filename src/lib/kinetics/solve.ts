/**
 * The closed-form solution of one batch under constant conditions, first form: evaluation by the non-negative propagator.
 */
import { components } from './components';
import { finalComposition } from './final-composition';
import { Propagator } from './propagator';
import type { LinearSystem, Mode, Solution, SolveMethod } from './types';

/**
 * Solves dc/dt = K c for one charge.
 * @param system flows of the network, 1/s
 * @param charge c(0), mol/L, length n
 * @throws RangeError when the charge has the wrong length or is not finite, or products multiply round a loop without limit.
 */
export function solve(system: LinearSystem, charge: ArrayLike<number>): Solution {
	return new PropagatedSolution(system, checkedCharge(system, charge));
}

function checkedCharge(system: LinearSystem, charge: ArrayLike<number>): Float64Array {
	if (charge.length !== system.n)
		throw new RangeError(`The charge has ${charge.length} values for ${system.n} species.`);
	const own = Float64Array.from(charge);
	own.forEach((value, i) => {
		if (!Number.isFinite(value))
			throw new RangeError(`The charge of species ${i + 1} is not a finite number.`);
	});
	return own;
}

class PropagatedSolution implements Solution {
	readonly n: number;
	readonly modes: Mode[] = [];
	readonly method: SolveMethod = 'uniformisation';
	readonly errorEstimate = 1e-13;
	readonly final: Float64Array;
	private readonly propagator: Propagator;
	private integrator: Propagator | null = null;

	constructor(
		private readonly system: LinearSystem,
		readonly charge: Float64Array
	) {
		this.n = system.n;
		const parts = components(system);
		this.propagator = new Propagator(system, parts);
		this.final = finalComposition(system, charge, parts).final;
	}

	at(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		if (!(timeS >= 0)) throw new RangeError(`A time ≥ 0 s is expected; found ${timeS} s.`);
		if (timeS === Infinity) out.set(this.final);
		else this.propagator.apply(timeS, this.charge, out);
		return out;
	}

	curves(
		timesS: ArrayLike<number>,
		out: Float64Array = new Float64Array(this.n * timesS.length)
	): Float64Array {
		for (let k = 0; k < timesS.length; k++) this.at(timesS[k], out.subarray(k * this.n, (k + 1) * this.n));
		return out;
	}

	slope(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		const c = this.at(timeS);
		for (let i = 0; i < this.n; i++) out[i] = -this.system.outflow[i] * c[i];
		for (const { from, to, rate, coefficient } of this.system.transfers)
			out[to] += rate * coefficient * c[from];
		return out;
	}

	integral(timeS: number, out: Float64Array = new Float64Array(this.n)): Float64Array {
		const { n, system } = this;
		if (!this.integrator) {
			const outflow = new Float64Array(2 * n);
			outflow.set(system.outflow);
			const collectors = Array.from({ length: n }, (_, i) => ({
				from: i,
				to: n + i,
				rate: 1,
				coefficient: 1,
				step: -1,
				direction: 'forward' as const
			}));
			this.integrator = new Propagator({
				n: 2 * n,
				transfers: [...system.transfers, ...collectors],
				outflow,
				flows: system.flows
			});
		}
		const start = new Float64Array(2 * n);
		start.set(this.charge);
		const end = this.integrator.apply(timeS, start, start);
		out.set(end.subarray(n));
		return out;
	}
}

/**
 * Curves and their analytic derivatives, for the fit: see `SensitivityWorkspace`.
 *
 * First form: the derivative with respect to ln k of one step-direction j → Σ ν_i i obeys
 *     d(s)/dt = K s + k (Σ ν_i e_i − e_j) c_j(t),   s(0) = 0
 * and is the difference of two non-negative solutions, one fed by the products and one by the reactant.
 */
import { Propagator } from './propagator';
import type { LinearSystem } from './types';

export type SensitivityParameter =
	{ kind: 'rate'; step: number; direction: 'forward' | 'reverse' } | { kind: 'charge'; species: number };

export interface SensitivityResult {
	/** c, times-major: curves[k·n + i] is species i at timesS[k], mol/L. */
	curves: Float64Array;
	/**
	 * derivatives[(p·times + k)·n + i]: of species i at timesS[k] with respect to parameter p.
	 * For a rate: dc/d ln k, mol/L. For a charge: dc/dc₀, dimensionless.
	 */
	derivatives: Float64Array;
}

/**
 * Curves and derivatives for one linear system, charge and list of times. Keep one workspace per (times, parameters) and call
 * `evaluate` for each new set of constants: the arrays of the result are the workspace's own and are overwritten by the next
 * call. Nothing is allocated per time.
 */
export class SensitivityWorkspace implements SensitivityResult {
	readonly curves: Float64Array;
	readonly derivatives: Float64Array;

	/**
	 * @param n number of species
	 * @param timesS times ≥ 0 in s, any order
	 * @param parameters what to differentiate by, in the order of the result
	 */
	constructor(
		readonly n: number,
		readonly timesS: Float64Array,
		readonly parameters: readonly SensitivityParameter[]
	) {
		this.curves = new Float64Array(timesS.length * n);
		this.derivatives = new Float64Array(parameters.length * timesS.length * n);
	}

	/** Fills `curves` and `derivatives`. A parameter whose constant is zero or absent has derivative 0. */
	evaluate(system: LinearSystem, charge: ArrayLike<number>): this {
		const { n, timesS, curves, derivatives } = this;
		const plain = new Propagator(system);
		const times = timesS.length;
		for (let k = 0; k < times; k++) plain.apply(timesS[k], charge, curves.subarray(k * n, (k + 1) * n));
		this.parameters.forEach((parameter, p) => {
			const out = derivatives.subarray(p * times * n, (p + 1) * times * n);
			if (parameter.kind === 'charge') {
				const unit = new Float64Array(n);
				unit[parameter.species] = 1;
				for (let k = 0; k < times; k++) plain.apply(timesS[k], unit, out.subarray(k * n, (k + 1) * n));
			} else this.rateDerivative(system, charge, parameter, out);
		});
		return this;
	}

	private rateDerivative(
		system: LinearSystem,
		charge: ArrayLike<number>,
		{ step, direction }: { step: number; direction: 'forward' | 'reverse' },
		out: Float64Array
	): void {
		const { n, timesS } = this;
		out.fill(0);
		const flow = system.flows?.find((f) => f.step === step && f.direction === direction);
		if (!flow) return;
		const products = system.transfers.filter((t) => t.step === step && t.direction === direction);
		const gain = fed(
			system,
			flow.from,
			products.map((t) => ({ to: t.to, rate: t.rate * t.coefficient }))
		);
		const loss = fed(system, flow.from, [{ to: flow.from, rate: flow.rate }]);
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

/** The system beside a copy of itself that is fed from species `from` without consuming it. */
function fed(system: LinearSystem, from: number, feeds: { to: number; rate: number }[]): Propagator {
	const { n } = system;
	const outflow = new Float64Array(2 * n);
	outflow.set(system.outflow);
	outflow.set(system.outflow, n);
	const copies = system.transfers.map((t) => ({ ...t, from: t.from + n, to: t.to + n, step: t.step + 1e6 }));
	const flows = system.flows && [
		...system.flows,
		...system.flows.map((f) => ({ ...f, from: f.from + n, step: f.step + 1e6 }))
	];
	const sources = feeds.map(({ to, rate }) => ({
		from,
		to: n + to,
		rate,
		coefficient: 1,
		step: -1,
		direction: 'forward' as const
	}));
	return new Propagator({
		n: 2 * n,
		transfers: [...system.transfers, ...copies, ...sources],
		outflow,
		flows
	});
}

/** Curves and derivatives once; see `SensitivityWorkspace` for shapes and for repeated use. */
export function sensitivities(
	system: LinearSystem,
	charge: ArrayLike<number>,
	timesS: ArrayLike<number>,
	parameters: readonly SensitivityParameter[]
): SensitivityResult {
	return new SensitivityWorkspace(system.n, Float64Array.from(timesS), parameters).evaluate(system, charge);
}

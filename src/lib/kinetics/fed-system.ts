/**
 * The system beside a copy of itself that is fed by one species: Van Loan's block triangular matrix
 *
 *     d/dt (c, s) = [[K, 0], [F, K]] (c, s),   F = Σ feeds into the copy, proportional to one c_j
 *
 * as a linear system of 2n species with non-negative flows, so that the propagator can evaluate s = ∫₀ᵗ e^{K(t−u)} F c(u) du
 * without subtraction. Source: C. F. Van Loan, IEEE Trans. Autom. Control 23 (1978) 395.
 */
import { Propagator } from './propagator';
import type { LinearSystem } from './types';

/** One step-direction: what it takes and what it gives. */
export interface StepFlow {
	from: number;
	rate: number;
	/** rate is already multiplied by the coefficient. */
	products: { to: number; rate: number }[];
}

/** The flow of a step-direction, null when it carries nothing. */
export function flowOf(
	system: LinearSystem,
	{ step, direction }: { step: number; direction: 'forward' | 'reverse' }
): StepFlow | null {
	const own = system.transfers.filter((t) => t.step === step && t.direction === direction);
	const flow = system.flows?.find((f) => f.step === step && f.direction === direction) ?? own[0];
	if (!flow) return null;
	return {
		from: flow.from,
		rate: flow.rate,
		products: own.map((t) => ({ to: t.to, rate: t.rate * t.coefficient }))
	};
}

/** The system beside a copy of itself that is fed from species `from` without consuming it. */
export function fedPropagator(
	system: LinearSystem,
	from: number,
	feeds: { to: number; rate: number }[]
): Propagator {
	const { n } = system;
	const outflow = new Float64Array(2 * n);
	outflow.set(system.outflow);
	outflow.set(system.outflow, n);
	const copies = system.transfers.map((t) => ({ ...t, from: t.from + n, to: t.to + n, step: t.step + COPY }));
	const flows = system.flows && [
		...system.flows,
		...system.flows.map((f) => ({ ...f, from: f.from + n, step: f.step + COPY }))
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

/** Added to the step numbers of the copy, so that they differ from the system's own. */
const COPY = 1e6;

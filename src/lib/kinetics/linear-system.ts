/**
 * From rate constants to the linear system dc/dt = K c.
 *
 * A step j → Σ ν_i i with constant k contributes k·ν_i to K[i][j] and takes k from K[j][j]. The flows are kept as they are
 * (`transfers`, `outflow`), so that K[j][j] is never formed by cancelling and structure (exact zeros, equal constants) stays
 * visible to the solver.
 *
 * | symbol | name here |
 * | --- | --- |
 * | k·ν_i, j → i | `transfers[].rate`, `.coefficient`, `.from`, `.to` |
 * | −K[j][j] | `outflow[j]` |
 */
import type { LinearSystem, Network, RateConstants, Step } from './types';

/**
 * Flows of the network under given constants. Steps whose constant is zero carry nothing and are left out.
 * @throws RangeError naming the step when a species is unknown or a constant is negative or not finite.
 */
export function linearSystem(network: Network, constants: RateConstants): LinearSystem {
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const n = network.species.length;
	const flows: NonNullable<LinearSystem['flows']> = [];
	const system: LinearSystem = { n, transfers: [], outflow: new Float64Array(n), flows };
	network.steps.forEach((step, i) => {
		const from = indexOf(index, step.reactant, step);
		const products = step.products.map((product) => ({
			to: indexOf(index, product.species, step),
			coefficient: product.coefficient
		}));
		const direct = (direction: 'forward' | 'reverse', rate: number, start: number, ends: typeof products) => {
			if (!(rate >= 0) || !Number.isFinite(rate))
				throw new RangeError(
					`Step ${step.id}: the ${direction} constant must be a finite number ≥ 0; found ${rate}.`
				);
			if (rate === 0) return;
			system.outflow[start] += rate;
			flows.push({ step: i, direction, from: start, rate });
			for (const { to, coefficient } of ends)
				system.transfers.push({ from: start, to, rate, coefficient, step: i, direction });
		};
		direct('forward', constants.forward[i], from, products);
		if (constants.reverse[i] !== 0 && products.length === 1)
			direct('reverse', constants.reverse[i], products[0].to, [{ to: from, coefficient: 1 }]);
	});
	return system;
}

function indexOf(index: Map<string, number>, species: string, step: Step): number {
	const found = index.get(species);
	if (found === undefined)
		throw new RangeError(`Step ${step.id}: species "${species}" is not in the scheme.`);
	return found;
}

/** K as a dense row-major n × n matrix, 1/s: K[to·n + from]. */
export function rateMatrix(system: LinearSystem): Float64Array {
	const { n, transfers, outflow } = system;
	const matrix = new Float64Array(n * n);
	for (const { from, to, rate, coefficient } of transfers) matrix[to * n + from] += rate * coefficient;
	for (let i = 0; i < n; i++) matrix[i * n + i] -= outflow[i];
	return matrix;
}

/** One signed rate constant in a cell of the rate matrix, with the step and direction that it comes from. */
export interface SymbolicTerm {
	sign: 1 | -1;
	coefficient: number;
	/** Symbol of the constant, e.g. k1 or k−1, numbered in step order. */
	symbol: string;
	stepId: string;
	direction: 'forward' | 'reverse';
}

/**
 * The rate matrix in symbols: cell [row][column] lists the terms of K[row][column], empty where there is none.
 * Steps that name an unknown species (still being drawn) are left out.
 */
export function symbolicMatrix(network: Network): SymbolicTerm[][][] {
	const n = network.species.length;
	const index = new Map(network.species.map((species, i) => [species.id, i]));
	const cells: SymbolicTerm[][][] = Array.from({ length: n }, () => Array.from({ length: n }, () => []));
	network.steps.forEach((step, i) => {
		const from = index.get(step.reactant);
		if (from === undefined) return;
		const term = (direction: 'forward' | 'reverse', sign: 1 | -1, coefficient: number): SymbolicTerm => ({
			sign,
			coefficient,
			symbol: direction === 'forward' ? `k${i + 1}` : `k\u2212${i + 1}`,
			stepId: step.id,
			direction
		});
		cells[from][from].push(term('forward', -1, 1));
		for (const product of step.products) {
			const to = index.get(product.species);
			if (to !== undefined) cells[to][from].push(term('forward', 1, product.coefficient));
		}
		const back = step.reverse && step.products.length === 1 ? index.get(step.products[0].species) : undefined;
		if (back === undefined) return;
		cells[from][back].push(term('reverse', 1, 1));
		cells[back][back].push(term('reverse', -1, 1));
	});
	return cells;
}

/** The system beside n collectors that gather ∫₀ᵗ c dt of each species without consuming it; species n + i collects i. */
export function withIntegrals(system: LinearSystem): LinearSystem {
	const { n } = system;
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
	return { n: 2 * n, transfers: [...system.transfers, ...collectors], outflow, flows: system.flows };
}

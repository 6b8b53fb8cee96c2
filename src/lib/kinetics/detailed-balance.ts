/**
 * Rates and vectors of a component in detailed balance, to full relative accuracy however stiff it is.
 *
 * Problem: a reversible component (A ⇌ B ⇌ C, with or without ways out) has real rates that may span many decades; a general
 * eigen-solver gets the slow ones wrong in absolute terms of the fast ones. With weights π_i (k_{i→j} π_i = k_{j→i} π_j round
 * every pair) and D = diag(π)
 *
 *     S = D^{−1/2} K D^{1/2} = −F Fᵀ,    one column of F per pair: √k_{i→j} at i, −√k_{j→i} at j; per exit: √k_exit at i
 *
 * so the rates are −σ² with σ the singular values of F, and S u = −σ² u gives K's right vectors D^{1/2}u and left vectors
 * D^{−1/2}u. One-sided Jacobi on the smaller side of F finds every σ with a small *relative* error. π is kept as logarithms.
 * No pivoted QR beforehand: it would spoil that.
 *
 * | symbol | name here |
 * | --- | --- |
 * | ln π_i | `logWeights` |
 * | F | `factor`, columns |
 * | u_j, −σ_j² | `vectors[j]`, `rates[j]` |
 *
 * Sources: J. Wei and C. D. Prater, Adv. Catal. 13 (1962) 203 (symmetrisation); J. Demmel and K. Veselić, Jacobi's method is
 * more accurate than QR, SIAM J. Matrix Anal. Appl. 13 (1992) 1204 (one-sided Jacobi).
 */
import { oneSidedJacobi } from './jacobi';

/** Total constants between the species of one component (local numbers) and out of it. */
export interface BlockFlows {
	m: number;
	/** rate[i·m + j]: from local i to local j, weighted by the coefficient, 1/s. */
	rate: Float64Array;
	/** 1/s out of the component from each species. */
	exits: Float64Array;
	/** True when all internal coefficients are 1. */
	unit: boolean;
}

export interface SymmetricModes {
	logWeights: Float64Array;
	/** −σ², 1/s, exactly 0 for the stationary mode of a component without exits. */
	rates: Float64Array;
	/** vectors[j]: u_j, unit length. */
	vectors: Float64Array[];
	/** Reversible pairs (local numbers, i < j) in the order of `differences`. */
	pairs: [i: number, j: number][];
	/**
	 * differences[mode][pair]: y_j − y_i of the left vector y = D^{−1/2}u, from Fᵀu itself. It is tiny for slow modes across a
	 * fast pair, and subtracting y_i from y_j would leave nothing but rounding there.
	 */
	differences: Float64Array[];
}

/** Largest |ln| by which constants round a loop may miss Wegscheider's condition and still count as balanced. */
const BALANCE = 1e-13;

/** Weights π as logarithms (largest 0), or null when the component is not in detailed balance. */
export function balanceWeights({ m, rate, unit }: BlockFlows): Float64Array | null {
	if (!unit) return null;
	const log = new Float64Array(m).fill(NaN);
	log[0] = 0;
	const queue = [0];
	for (const i of queue)
		for (let j = 0; j < m; j++) {
			const out = rate[i * m + j];
			const back = rate[j * m + i];
			if (out === 0 && back === 0) continue;
			if (out === 0 || back === 0) return null;
			const value = log[i] + Math.log(out / back);
			if (Number.isNaN(log[j])) {
				log[j] = value;
				queue.push(j);
			} else if (Math.abs(log[j] - value) > BALANCE * (1 + Math.abs(value))) return null;
		}
	let top = -Infinity;
	for (let i = 0; i < m; i++) top = Math.max(top, log[i]);
	for (let i = 0; i < m; i++) log[i] -= top;
	return log;
}

/** All modes of a component with the given balance weights. */
export function symmetricModes(flows: BlockFlows, logWeights: Float64Array): SymmetricModes {
	const { m } = flows;
	const { columns, pairs } = factorColumns(flows);
	const closed = flows.exits.every((rate) => rate === 0);
	const modes = columns.length < m ? fromColumns(columns) : fromRows(columns, m, closed);
	if (closed)
		modes.push({ rate: 0, vector: rootWeights(logWeights), image: new Float64Array(columns.length) });
	modes.sort((a, b) => a.rate - b.rate);
	const rates = new Float64Array(m);
	const vectors: Float64Array[] = [];
	const differences: Float64Array[] = [];
	for (let mode = 0; mode < m; mode++) {
		rates[mode] = modes[mode].rate;
		vectors.push(modes[mode].vector);
		differences.push(differencesOf(modes[mode].image, pairs, flows, logWeights));
	}
	return { logWeights, rates, vectors, pairs, differences };
}

function differencesOf(
	image: Float64Array,
	pairs: [number, number][],
	{ m, rate }: BlockFlows,
	logWeights: Float64Array
): Float64Array {
	const differences = new Float64Array(pairs.length);
	for (let p = 0; p < pairs.length; p++) {
		const [i, j] = pairs[p];
		differences[p] = -(Math.exp(-logWeights[i] / 2) / Math.sqrt(rate[i * m + j])) * image[p];
	}
	return differences;
}

interface RateVector {
	rate: number;
	vector: Float64Array;
	/** Fᵀu, one entry a column of F, pairs first. */
	image: Float64Array;
}

/** Columns of F: reversible pairs first, then ways out. */
function factorColumns({ m, rate, exits }: BlockFlows) {
	const columns: Float64Array[] = [];
	const pairs: [number, number][] = [];
	for (let i = 0; i < m; i++)
		for (let j = i + 1; j < m; j++) {
			if (rate[i * m + j] === 0) continue;
			const column = new Float64Array(m);
			column[i] = Math.sqrt(rate[i * m + j]);
			column[j] = -Math.sqrt(rate[j * m + i]);
			columns.push(column);
			pairs.push([i, j]);
		}
	for (let i = 0; i < m; i++) {
		if (exits[i] === 0) continue;
		const column = new Float64Array(m);
		column[i] = Math.sqrt(exits[i]);
		columns.push(column);
	}
	return { columns, pairs };
}

/** Fewer pairs and exits than species (a tree without exits): rotate the columns; u is the rotated column itself. */
function fromColumns(columns: Float64Array[]): RateVector[] {
	const turns = identity(columns.length);
	oneSidedJacobi(columns, turns);
	return columns.map((column, j) => {
		const size = norm(column);
		return {
			rate: -size * size,
			vector: column.map((value) => value / size),
			image: turns[j].map((value) => value * size)
		};
	});
}

/** Otherwise rotate the rows and gather the rotations; without exits the smallest row is the stationary mode, known exactly. */
function fromRows(columns: Float64Array[], m: number, closed: boolean): RateVector[] {
	const rows: Float64Array[] = [];
	for (let i = 0; i < m; i++) {
		const row = new Float64Array(columns.length);
		for (let j = 0; j < columns.length; j++) row[j] = columns[j][i];
		rows.push(row);
	}
	const vectors = identity(m);
	oneSidedJacobi(rows, vectors);
	const modes = rows.map((row, j) => ({ rate: -(norm(row) ** 2), vector: vectors[j], image: row }));
	return closed ? modes.sort((a, b) => a.rate - b.rate).slice(0, -1) : modes;
}

function identity(m: number): Float64Array[] {
	const rows: Float64Array[] = [];
	for (let i = 0; i < m; i++) {
		const row = new Float64Array(m);
		row[i] = 1;
		rows.push(row);
	}
	return rows;
}

function rootWeights(logWeights: Float64Array): Float64Array {
	const root = new Float64Array(logWeights.length);
	for (let i = 0; i < root.length; i++) root[i] = Math.exp(logWeights[i] / 2);
	const size = norm(root);
	for (let i = 0; i < root.length; i++) root[i] /= size;
	return root;
}

function norm(vector: Float64Array): number {
	let sum = 0;
	for (let i = 0; i < vector.length; i++) sum += vector[i] * vector[i];
	return Math.sqrt(sum);
}

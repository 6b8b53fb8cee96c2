/**
 * From species to modes: a basis in which dc/dt = K c becomes lower triangular.
 *
 * Each strongly connected component b is brought to its own modes, c_b = V_b y_b, y_b = W_b c_b:
 *   - one species: V = W = 1, rate −outflow, exact;
 *   - detailed balance: V = D^{1/2}U, W = UᵀD^{−1/2}, rates by one-sided Jacobi;
 *   - otherwise: complex Schur form, V = D U, W = UᴴD⁻¹, with a triangular coupling inside the component.
 * Components upstream first, the whole system then reads
 *
 *     dy/dt = T y,   T lower triangular,   T_ab = W_a K_ab V_b between components
 *
 * so that equal rates in *different* components (the ordinary case of a defective matrix, e.g. A → B ⇌ C with 0.4/0.3/0.1)
 * show up as equal diagonal entries of T, where the confluent recursion of `triangular-modes.ts` deals with them.
 *
 * | symbol | name here |
 * | --- | --- |
 * | V (species × mode), W (mode × species) | `v`, `w` |
 * | λ, strictly lower part of T | `lambda`, `t` |
 * | entrywise bounds of |V| and |T| for error estimates | `vBound`, `tBound` |
 *
 * Sources: Tarjan 1972 (components); J. Wei and C. D. Prater 1962 (symmetrisation); Golub and Van Loan 2013 (Schur form).
 */
import type { BlockWeights } from './block-weights';
import type { Components } from './components';
import { balanceWeights, symmetricModes, type BlockFlows } from './detailed-balance';
import { Scratch } from './scratch';
import { complexSchur, type ComplexMatrix } from './schur';
import type { LinearSystem } from './types';

export type BlockKind = 'single' | 'detailed balance' | 'general';

export interface ModeSpace {
	n: number;
	lambda: { re: Float64Array; im: Float64Array };
	v: ComplexMatrix;
	w: ComplexMatrix;
	t: ComplexMatrix;
	vBound: Float64Array;
	wBound: Float64Array;
	tBound: Float64Array;
	/**
	 * W (e_to − e_from) of each reversible pair of a component in detailed balance, keyed from·n + to: first mode of the
	 * component and the values of its modes, right in relative terms (see `SymmetricModes.differences`).
	 */
	pairDifferences: Map<number, { first: number; values: Float64Array }>;
	/** Kind of the component that each mode belongs to. */
	kinds: BlockKind[];
	complex: boolean;
	/** False when a basis could not be formed in double precision. */
	usable: boolean;
}

/** Spread of ln π beyond which V and W would over- or underflow. */
const WIDEST_WEIGHTS = 1200;

/** @param scratch memory for the matrices, where the result is not kept */
export function modeSpace(
	system: LinearSystem,
	parts: Components,
	balance: BlockWeights,
	scratch = new Scratch()
): ModeSpace {
	const { n } = system;
	// One buffer for all: allocating is what costs here. Imaginary parts are shared zeros until a component needs them.
	const own = scratch.zeros(6 * n * n);
	const part = (k: number) => own.subarray(k * n * n, (k + 1) * n * n);
	const real = (k: number): ComplexMatrix => ({ m: n, re: part(k), im: zeros(n) });
	const space: ModeSpace = {
		n,
		lambda: { re: new Float64Array(n), im: new Float64Array(n) },
		v: real(0),
		w: real(1),
		t: real(2),
		vBound: part(3),
		wBound: part(4),
		tBound: part(5),
		pairDifferences: new Map(),
		kinds: new Array<BlockKind>(n).fill('single'),
		complex: false,
		usable: true
	};
	const modesOf = new Int32Array(parts.blocks.length);
	let first = 0;
	for (let b = 0; b < parts.blocks.length; b++) {
		const block = parts.blocks[b];
		modesOf[b] = first;
		if (block.length === 1) singleBlock(space, system, block[0], first);
		else coupledBlock(space, system, block, first, balance.exits, balance.unit[b]);
		first += block.length;
	}
	couple(space, system, parts, modesOf);
	return space;
}

const zeroMatrices: Float64Array[] = [];

/** n × n zeros, shared and never written to. */
function zeros(n: number): Float64Array {
	return (zeroMatrices[n] ??= new Float64Array(n * n));
}

function makeComplex(space: ModeSpace): void {
	if (space.complex) return;
	space.complex = true;
	for (const matrix of [space.v, space.w, space.t]) matrix.im = new Float64Array(space.n * space.n);
}

function singleBlock(space: ModeSpace, system: LinearSystem, species: number, mode: number): void {
	const { n } = space;
	space.lambda.re[mode] = system.outflow[species] === 0 ? 0 : -system.outflow[species];
	space.v.re[species * n + mode] = space.vBound[species * n + mode] = 1;
	space.w.re[mode * n + species] = space.wBound[mode * n + species] = 1;
}

function coupledBlock(
	space: ModeSpace,
	system: LinearSystem,
	block: Int32Array,
	first: number,
	exits: Float64Array,
	unit: boolean
): void {
	const flows = blockFlows(system, block, exits, unit);
	const logWeights = balanceWeights(flows);
	if (logWeights) balancedBlock(space, block, first, flows, logWeights);
	else generalBlock(space, system, block, first, flows);
}

function blockFlows(system: LinearSystem, block: Int32Array, exits: Float64Array, unit: boolean): BlockFlows {
	const m = block.length;
	const rate = new Float64Array(m * m);
	for (const t of system.transfers) {
		const i = block.indexOf(t.from);
		const j = i < 0 ? -1 : block.indexOf(t.to);
		if (j >= 0) rate[i * m + j] += t.rate * t.coefficient;
	}
	const own = new Float64Array(m);
	for (let i = 0; i < m; i++) own[i] = exits[block[i]];
	return { m, rate, exits: own, unit };
}

function balancedBlock(
	space: ModeSpace,
	block: Int32Array,
	first: number,
	flows: BlockFlows,
	logWeights: Float64Array
): void {
	const { n, v, w, vBound, wBound } = space;
	for (let i = 0; i < flows.m; i++) if (logWeights[i] < -WIDEST_WEIGHTS) space.usable = false;
	const { rates, vectors, pairs, differences } = symmetricModes(flows, logWeights);
	for (let p = 0; p < pairs.length; p++) notePair(space, block, first, pairs[p], p, differences);
	for (let j = 0; j < flows.m; j++) {
		space.lambda.re[first + j] = rates[j];
		space.kinds[first + j] = 'detailed balance';
	}
	for (let i = 0; i < flows.m; i++) {
		const species = block[i];
		const root = Math.exp(Math.max(logWeights[i], -WIDEST_WEIGHTS) / 2);
		for (let j = 0, mode = first; j < flows.m; j++, mode++) {
			v.re[species * n + mode] = root * vectors[j][i];
			w.re[mode * n + species] = vectors[j][i] / root;
			vBound[species * n + mode] = root;
			wBound[mode * n + species] = 1 / root;
		}
	}
}

/** Keeps the differences of the left vectors across one reversible pair, both ways round. */
function notePair(
	{ n, pairDifferences }: ModeSpace,
	block: Int32Array,
	first: number,
	[i, j]: [number, number],
	pair: number,
	differences: Float64Array[]
): void {
	const forward = new Float64Array(differences.length);
	const reverse = new Float64Array(differences.length);
	for (let mode = 0; mode < differences.length; mode++) {
		forward[mode] = differences[mode][pair];
		reverse[mode] = -differences[mode][pair];
	}
	pairDifferences.set(block[i] * n + block[j], { first, values: forward });
	pairDifferences.set(block[j] * n + block[i], { first, values: reverse });
}

function generalBlock(
	space: ModeSpace,
	system: LinearSystem,
	block: Int32Array,
	first: number,
	{ m, rate, exits }: BlockFlows
): void {
	const matrix = new Float64Array(m * m);
	for (let i = 0; i < m; i++) for (let j = 0; j < m; j++) if (i !== j) matrix[j * m + i] = rate[i * m + j];
	block.forEach((species, i) => (matrix[i * m + i] = -system.outflow[species]));
	const { scale, u, t, converged } = complexSchur(matrix, m);
	if (!converged) space.usable = false;
	makeComplex(space);
	cleanEigenvalues(t, exits);
	for (let j = 0; j < m; j++) placeSchurMode(space, block, first, j, scale, u, t);
}

/** Mode number m − 1 − j, so that the upper triangular Schur form becomes lower triangular. */
function placeSchurMode(
	space: ModeSpace,
	block: Int32Array,
	first: number,
	j: number,
	scale: Float64Array,
	u: ComplexMatrix,
	t: ComplexMatrix
): void {
	const { n, v, w, vBound, wBound, tBound } = space;
	const m = block.length;
	const mode = first + m - 1 - j;
	space.kinds[mode] = 'general';
	space.lambda.re[mode] = t.re[j * m + j];
	space.lambda.im[mode] = t.im[j * m + j];
	block.forEach((species, i) => {
		v.re[species * n + mode] = scale[i] * u.re[i * m + j];
		v.im[species * n + mode] = scale[i] * u.im[i * m + j];
		w.re[mode * n + species] = u.re[i * m + j] / scale[i];
		w.im[mode * n + species] = -u.im[i * m + j] / scale[i];
		vBound[species * n + mode] = scale[i];
		wBound[mode * n + species] = 1 / scale[i];
	});
	for (let k = j + 1; k < m; k++) {
		const at = mode * n + first + m - 1 - k;
		space.t.re[at] = t.re[j * m + k];
		space.t.im[at] = t.im[j * m + k];
		tBound[at] = Math.hypot(t.re[j * m + k], t.im[j * m + k]);
	}
}

/** Removes what is rounding: the imaginary part of real modes, and the stationary mode of a component without exits. */
function cleanEigenvalues(t: ComplexMatrix, exits: Float64Array): void {
	const { m, re, im } = t;
	let size = 0;
	for (let j = 0; j < m; j++) size = Math.max(size, Math.abs(re[j * m + j]));
	let nearest = 0;
	for (let j = 0; j < m; j++) {
		const at = j * m + j;
		if (Math.abs(im[at]) <= 1e-14 * size) im[at] = 0;
		if (Math.hypot(re[at], im[at]) < Math.hypot(re[nearest * m + nearest], im[nearest * m + nearest]))
			nearest = j;
	}
	if (exits.every((rate) => rate === 0)) re[nearest * m + nearest] = im[nearest * m + nearest] = 0;
}

/** T_ab = Σ W[a][to] k V[from][b] over the flows between components. */
function couple(space: ModeSpace, system: LinearSystem, parts: Components, modesOf: Int32Array): void {
	const { n, v, w, t, vBound, wBound, tBound } = space;
	for (const { from, to, rate, coefficient } of system.transfers) {
		const source = parts.blockOf[from];
		const target = parts.blockOf[to];
		const k = rate * coefficient;
		if (source === target || k === 0) continue;
		for (let a = modesOf[target]; a < modesOf[target] + parts.blocks[target].length; a++)
			for (let b = modesOf[source]; b < modesOf[source] + parts.blocks[source].length; b++) {
				const wRe = w.re[a * n + to] * k;
				const wIm = w.im[a * n + to] * k;
				const at = a * n + b;
				t.re[at] += wRe * v.re[from * n + b] - wIm * v.im[from * n + b];
				if (space.complex) t.im[at] += wRe * v.im[from * n + b] + wIm * v.re[from * n + b];
				tBound[at] += wBound[a * n + to] * k * vBound[from * n + b];
			}
	}
}

/**
 * Weights that make a component conserve.
 *
 * Problem: within a component whose steps have coefficients other than 1 (A → 2 B, B → ½ A), amounts are not conserved but a
 * weighted sum is (here A + ½ B). The non-negative evaluation renormalises to that sum, so it needs w > 0 with wᵀK_bb ≤ 0.
 * Where no such w exists (A → 2 B, B → A) amounts multiply round the loop without limit, and the scheme is refused.
 *
 * | symbol | name here |
 * | --- | --- |
 * | K_bb | internal part of the rate matrix of one component |
 * | w | `weights`, 1 everywhere for ordinary 1:1 steps |
 * | (−wᵀK_bb)_j / w_j | `exits[j]`: what leaves the component from species j, 1/s |
 *
 * Where the coefficients alone settle it (no step-direction gives more weight than it takes, w carried along a spanning tree),
 * no constant enters, so that constants may differ by any ratio. Otherwise w solves a linear system in the constants.
 *
 * An irreducible −K_bb is an M-matrix exactly when such a w exists: A. Berman and R. J. Plemmons, Nonnegative Matrices in
 * the Mathematical Sciences, SIAM 1994, ch. 6.
 */
import type { Components } from './components';
import type { LinearSystem } from './types';

export interface BlockWeights {
	weights: Float64Array;
	exits: Float64Array;
	/** True for the component of a species when all internal coefficients are 1. */
	unit: boolean[];
}

/** Relative size below which a species' weighted exit is taken as rounding of zero. */
const EXIT_ROUNDING = 1e-13;

/** @throws RangeError when products multiply round a loop without limit. */
export function blockWeights(system: LinearSystem, parts: Components): BlockWeights {
	const { n, transfers, outflow } = system;
	const weights = new Float64Array(n).fill(1);
	const exits = new Float64Array(n);
	const unit = unitBlocks(system, parts);
	if (parts.blocks.length === n) {
		exits.set(outflow);
		return { weights, exits, unit };
	}
	const byFlow = new Uint8Array(parts.blocks.length);
	parts.blocks.forEach((block, b) => {
		if (unit[b]) return;
		if (treeWeights(system, parts, block, weights)) byFlow[b] = 1;
		else solveWeights(system, parts, block, weights);
	});
	const internal = new Float64Array(n);
	const leaving = leavingRates(system, parts);
	for (const { from, to, rate, coefficient } of transfers)
		if (parts.blockOf[from] === parts.blockOf[to])
			internal[from] += (rate * coefficient * weights[to]) / weights[from];
	const shortfall = shortfalls(system, parts, weights);
	for (let j = 0; j < n; j++) {
		const b = parts.blockOf[j];
		if (unit[b]) exits[j] = leaving[j];
		else if (byFlow[b]) exits[j] = leaving[j] + shortfall[j];
		else {
			const rest = outflow[j] - internal[j];
			exits[j] = rest > EXIT_ROUNDING * outflow[j] ? rest : 0;
		}
	}
	return { weights, exits, unit };
}

/** What a step-direction gives within its component, by key: total weight of its products over that of its reactant. */
function kept({ transfers }: LinearSystem, parts: Components, weights: Float64Array): Map<number, number> {
	const share = new Map<number, number>();
	for (const t of transfers) {
		if (parts.blockOf[t.from] !== parts.blockOf[t.to]) continue;
		const key = flowKey(t);
		share.set(key, (share.get(key) ?? 0) + (t.coefficient * weights[t.to]) / weights[t.from]);
	}
	return share;
}

/** Weight that leaves with step-directions that keep only a part of it within the component, 1/s of each species. */
function shortfalls(system: LinearSystem, parts: Components, weights: Float64Array): Float64Array {
	const out = new Float64Array(system.n);
	const share = kept(system, parts, weights);
	for (const flow of system.flows ?? []) {
		const missing = 1 - (share.get(flowKey(flow)) ?? 1);
		if (missing > EXIT_ROUNDING) out[flow.from] += flow.rate * missing;
	}
	return out;
}

/** Weights from the coefficients along a spanning tree; false where some step-direction gives more than it takes. */
function treeWeights(
	system: LinearSystem,
	parts: Components,
	block: Int32Array,
	weights: Float64Array
): boolean {
	if (!system.flows) return false;
	const own = parts.blockOf[block[0]];
	const inside = system.transfers.filter((t) => parts.blockOf[t.from] === own && parts.blockOf[t.to] === own);
	const found = new Map([[block[0], 1]]);
	for (let grew = true; grew;) {
		grew = false;
		for (const { from, to, coefficient } of inside) {
			const [a, b] = [found.get(from), found.get(to)];
			if (a !== undefined && b === undefined) found.set(to, a / coefficient);
			else if (a === undefined && b !== undefined) found.set(from, b * coefficient);
			else continue;
			grew = true;
		}
	}
	const largest = Math.max(...found.values());
	const trial = weights.slice();
	found.forEach((weight, species) => (trial[species] = weight / largest));
	const share = kept(system, parts, trial);
	if (inside.some((t) => (share.get(flowKey(t)) ?? 0) > 1 + EXIT_ROUNDING)) return false;
	weights.set(trial);
	return true;
}

/** One number per step-direction. */
function flowKey({ step, direction }: { step: number; direction: 'forward' | 'reverse' }): number {
	return 2 * step + (direction === 'reverse' ? 1 : 0);
}

function unitBlocks(system: LinearSystem, parts: Components): boolean[] {
	const unit = parts.blocks.map(() => true);
	const seen = new Set<number>();
	for (const t of system.transfers) {
		const b = parts.blockOf[t.from];
		if (b !== parts.blockOf[t.to]) continue;
		const key = flowKey(t);
		if (t.coefficient !== 1 || (t.step >= 0 && seen.has(key))) unit[b] = false;
		seen.add(key);
	}
	return unit;
}

/**
 * Rate of leaving the component from each species, summed over the flows that have no product inside it. With `flows` absent
 * (a hand-made system) it is outflow minus what stays, exact when nothing leaves because both are the same sums.
 */
function leavingRates(system: LinearSystem, parts: Components): Float64Array {
	const { n, transfers, outflow, flows } = system;
	const leaving = new Float64Array(n);
	const stays = new Set<number>();
	const staying = new Float64Array(n);
	for (const t of transfers)
		if (parts.blockOf[t.from] === parts.blockOf[t.to]) {
			stays.add(flowKey(t));
			staying[t.from] += t.rate * t.coefficient;
		}
	if (flows) {
		for (const f of flows) if (!stays.has(flowKey(f))) leaving[f.from] += f.rate;
		return leaving;
	}
	for (let j = 0; j < n; j++) {
		const rest = outflow[j] - staying[j];
		leaving[j] = rest > 4e-16 * outflow[j] ? rest : 0;
	}
	return leaving;
}

/** Solves wᵀ(−K_bb + μI) = sᵀ with a tiny μ: the Perron direction when K_bb is singular, a positive w when it is not. */
function solveWeights(
	system: LinearSystem,
	parts: Components,
	block: Int32Array,
	weights: Float64Array
): void {
	const m = block.length;
	const local = new Map(Array.from(block, (species, k) => [species, k]));
	const a = Array.from({ length: m }, () => new Float64Array(m + 1));
	block.forEach((species, j) => {
		a[j][j] += system.outflow[species] * (1 + 1e-15);
		a[j][m] = system.outflow[species];
	});
	for (const { from, to, rate, coefficient } of system.transfers) {
		const j = local.get(from);
		const i = local.get(to);
		if (i !== undefined && j !== undefined) a[j][i] -= rate * coefficient;
	}
	const w = gauss(a);
	const largest = Math.max(...w);
	if (!(largest > 0) || w.some((value) => !(value > 0)))
		throw new RangeError(
			'The products of a loop of steps multiply without limit: check the coefficients round the loop.'
		);
	block.forEach((species, k) => (weights[species] = w[k] / largest));
}

function gauss(a: Float64Array[]): Float64Array {
	const m = a.length;
	for (let c = 0; c < m; c++) {
		let pivot = c;
		for (let r = c + 1; r < m; r++) if (Math.abs(a[r][c]) > Math.abs(a[pivot][c])) pivot = r;
		[a[c], a[pivot]] = [a[pivot], a[c]];
		for (let r = 0; r < m; r++) {
			if (r === c || a[r][c] === 0) continue;
			const f = a[r][c] / a[c][c];
			for (let k = c; k <= m; k++) a[r][k] -= f * a[c][k];
		}
	}
	return Float64Array.from(a, (row, i) => row[m] / row[i]);
}

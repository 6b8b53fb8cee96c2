/**
 * Linear dependencies among responses: combinations that vary no more from row to row than rounding makes them.
 *
 *     D = Y − row of means, columns divided by their rounding error r_j = step_j/√12
 *     singular values σ_k of D: σ_k² ≈ N − 1 where a combination holds but for rounding
 *
 * Such a combination (a mass balance, a value obtained by difference) carries no error of its own: it makes ZᵀZ singular, or nearly,
 * and would rule the determinant. It is taken out; the criterion uses the independent combinations that are left.
 *
 * | symbol | variable |
 * | ------ | -------- |
 * | Y | `values`, row by row |
 * | r_j | `rounding` |
 *
 * Source: Box, Hunter, MacGregor & Erjavec, Technometrics 15 (1973) 33; McLean, Pritchard, Bacon & Downie, Technometrics 21
 * (1979) 291 (from memory); Bates & Watts (1988) 4.4.
 */
import { singularValues } from './linear-algebra';
import { figure } from './words';

export interface Dependencies {
	/** One row for each dependency: weights of the responses, the one that follows from the others first set to one. */
	weights: number[][];
	words: string[];
	/** Orthonormal combinations that are left, one row each. */
	independent: number[][];
}

/** Variance of a combination, in units of what rounding alone gives, up to which it counts as a dependency. */
const ROUNDING_LEVEL = 10;
/** Share of its own size below which a combination is zero whatever the recording step. */
const RELATIVE = 1e-9;

/** Smallest step that the recorded numbers of a column show. */
export function recordedStep(column: number[]): number {
	const decimals = Math.max(
		0,
		...column.map((v) => {
			const [mantissa, exponent = '0'] = v.toString().split('e');
			return (mantissa.split('.')[1]?.length ?? 0) - Number(exponent);
		})
	);
	return 10 ** -decimals;
}

/** @param values rows × responses, as recorded */
export function dependenciesOf(values: number[][], names: string[]): Dependencies {
	const [n, q] = [values.length, names.length];
	const columns = names.map((_, j) => values.map((row) => row[j]));
	const means = columns.map((c) => c.reduce((a, v) => a + v, 0) / n);
	const size = (j: number) => Math.max(...columns[j].map(Math.abs)) || 1;
	const rounding = columns.map((c, j) => Math.max(recordedStep(c) / Math.sqrt(12), RELATIVE * size(j)));
	const scaled = new Float64Array(n * q);
	for (let j = 0; j < q; j++)
		for (let u = 0; u < n; u++) scaled[j * n + u] = (columns[j][u] - means[j]) / rounding[j];
	const { values: sigma, vectors } = singularValues(scaled, n, q);
	const found: number[][] = [];
	for (let k = 0; k < q; k++)
		if (sigma[k] ** 2 <= ROUNDING_LEVEL * Math.max(n - 1, 1))
			found.push(names.map((_, j) => vectors[k * q + j] / rounding[j]));
	// One response at least is left: all of them constant is no mass balance.
	const kept = withSum(found.slice(-(q - 1)), values, rounding);
	const weights = echelon(kept);
	return {
		weights,
		words: weights.map((w) => inWords(w, names, means)),
		independent: complement(weights, q)
	};
}

/**
 * Where the plain sum of all responses is one of the combinations (a mass balance), it stands in exactly: the others are found
 * only to rounding.
 */
function withSum(found: number[][], values: number[][], rounding: number[]): number[][] {
	if (found.length === 0) return found;
	const sums = values.map((row) => row.reduce((a, v) => a + v, 0));
	const mean = sums.reduce((a, v) => a + v, 0) / sums.length;
	const scatter = sums.reduce((a, v) => a + (v - mean) ** 2, 0);
	const allowed = rounding.reduce((a, r) => a + r * r, 0) * ROUNDING_LEVEL * Math.max(sums.length - 1, 1);
	if (scatter > allowed) return found;
	// In units of rounding the combinations are orthogonal; the one most like the sum gives way to it.
	const likeness = found.map(
		(w) =>
			Math.abs(w.reduce((a, v, j) => a + v * rounding[j] ** 2, 0)) /
			Math.hypot(...w.map((v, j) => v * rounding[j]))
	);
	const nearest = likeness.indexOf(Math.max(...likeness));
	return [found[0].map(() => 1), ...found.filter((_, k) => k !== nearest)];
}

/** Reduced row echelon form with large entries as pivots, the last of them first: each row says one response by as few others as can be. */
function echelon(rows: number[][]): number[][] {
	const out = rows.map((r) => r.slice());
	const used = new Set<number>();
	// The plain sum is said as it stands; it only helps the others to a response less.
	const isSum = rows.length > 0 && rows[0].every((w) => w === 1);
	for (let k = 0; k < out.length; k++) {
		let [pivot, at] = [-1, k];
		if (isSum && k === 0) pivot = out[0].length - 1;
		for (let i = k; i < out.length && !(isSum && k === 0); i++) {
			const largest = Math.max(...out[i].map(Math.abs));
			out[i].forEach((v, j) => {
				if (used.has(j) || Math.abs(v) < 0.3 * largest) return;
				if (pivot < 0 || j > pivot) [pivot, at] = [j, i];
			});
		}
		if (pivot < 0) break;
		[out[k], out[at]] = [out[at], out[k]];
		used.add(pivot);
		const scale = out[k][pivot];
		out[k] = out[k].map((v) => v / scale);
		for (let i = 0; i < out.length; i++)
			if (i !== k && !(i === 0 && isSum)) {
				const share = out[i][pivot];
				out[i] = out[i].map((v, j) => v - share * out[k][j]);
			}
	}
	return out;
}

function inWords(weights: number[], names: string[], means: number[]): string {
	if (weights.every((w) => w === 1)) {
		const total = means.reduce((a, v) => a + v, 0);
		return `${names.join(' + ')} is the same in every row within rounding (${figure(total, 4)})`;
	}
	const lead = weights.indexOf(1);
	const others = weights
		.map((w, j) => ({ w, j }))
		.filter(({ w, j }) => j !== lead && Math.abs(w) > 0.01)
		.sort((a, b) => a.j - b.j);
	const level = weights.reduce((sum, w, j) => sum + w * means[j], 0);
	const terms = others.map(({ w, j }) => {
		const amount = Math.abs(Math.abs(w) - 1) < 0.05 ? '' : `${figure(Math.abs(w), 2)} `;
		return `${w > 0 ? '−' : '+'} ${amount}${names[j]}`;
	});
	return others.length
		? `${names[lead]} follows from the others within rounding: ${names[lead]} = ${[figure(level, 3), ...terms].join(' ')}`
		: `${names[lead]} is the same in every row within rounding`;
}

/** Orthonormal rows that span what the dependencies leave, by Gram–Schmidt on the unit vectors (twice, for its digits). */
function complement(dependent: number[][], q: number): number[][] {
	const basis: number[][] = [];
	const add = (v: number[]): boolean => {
		let out = v.slice();
		for (let pass = 0; pass < 2; pass++)
			for (const b of basis) {
				const dot = b.reduce((sum, x, j) => sum + x * out[j], 0);
				out = out.map((x, j) => x - dot * b[j]);
			}
		const length = Math.hypot(...out);
		if (length < 1e-6 * Math.hypot(...v)) return false;
		basis.push(out.map((x) => x / length));
		return true;
	};
	for (const row of dependent) add(row);
	const from = basis.length;
	for (let j = 0; j < q && basis.length < q; j++) add(Array.from({ length: q }, (_, i) => (i === j ? 1 : 0)));
	return basis.slice(from);
}

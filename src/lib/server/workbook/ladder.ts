/**
 * The matrix exponential as the sheet "Verify" evaluates it, from the rate constants alone: no eigenvalue takes part.
 *
 *     E₀ = e^{K h}            Taylor polynomial of degree 8, with ‖K‖₁ h ≤ 0.02
 *     E_{j+1} = E_j · E_j     squarings
 *     t = m h + r,  m = Σ_j b_j 2^j,  0 ≤ r < h
 *     c(t) = Π_j E_j^{b_j} · T₈(K r) c₀
 *
 * With ‖K‖h ≤ 0.02 the Taylor remainder is below 0.02⁹/9! ≈ 1.4e-21; rounding in E_j grows as 2^j ε.
 * Source of the method: scaling and squaring, C. Moler and C. Van Loan, SIAM Rev. 45 (2003) 3, method 3.
 *
 * | symbol | name here |
 * | --- | --- |
 * | K | `matrix`, row-major, 1/(time unit of the run) |
 * | h, s | `stepLength`, `squarings` |
 */
export const DEGREE = 8;
export const NORM_LIMIT = 0.02;

export type Matrix = number[][];

export interface Ladder {
	n: number;
	matrix: Matrix;
	stepLength: number;
	squarings: number;
	/** E_0 … E_s */
	powers: Matrix[];
	/** The Taylor blocks in the order in which the sheet shows them. */
	taylor: Matrix[];
	scaled: Matrix;
}

export const norm1 = (matrix: Matrix): number =>
	Math.max(0, ...matrix.map((_, j) => matrix.reduce((sum, row) => sum + Math.abs(row[j]), 0)));

const product = (a: Matrix, b: Matrix): Matrix =>
	a.map((row) => b[0].map((_, j) => row.reduce((sum, value, k) => sum + value * b[k][j], 0)));

const times = (matrix: Matrix, vector: number[]): number[] =>
	matrix.map((row) => row.reduce((sum, value, k) => sum + value * vector[k], 0));

/** Ladder that reaches every time up to `longest`. */
export function buildLadder(matrix: Matrix, longest: number): Ladder {
	const n = matrix.length;
	const reach = norm1(matrix) * longest;
	const squarings = reach <= NORM_LIMIT ? 0 : Math.ceil(Math.log2(reach / NORM_LIMIT));
	const stepLength = longest > 0 ? longest / 2 ** squarings : 1;
	const scaled = matrix.map((row) => row.map((v) => v * stepLength));
	const unit = (i: number, j: number) => (i === j ? 1 : 0);
	let block: Matrix = scaled.map((row, i) => row.map((v, j) => unit(i, j) + v / DEGREE));
	const taylor = [block];
	for (let m = DEGREE - 1; m >= 1; m--) {
		const next = product(scaled, block);
		block = next.map((row, i) => row.map((v, j) => unit(i, j) + v / m));
		taylor.push(block);
	}
	const powers = [block];
	for (let j = 0; j < squarings; j++) powers.push(product(powers[j], powers[j]));
	return { n, matrix, stepLength, squarings, powers, taylor, scaled };
}

export interface Climb {
	whole: number;
	rest: number;
	/** c₀, then each Taylor term. */
	terms: number[][];
	/** Sum of the terms, then the vector after each power. */
	steps: number[][];
}

/** c(t) with every vector on the way, as the sheet shows them. */
export function climb(ladder: Ladder, charge: number[], time: number): Climb {
	const whole = Math.floor(time / ladder.stepLength);
	const rest = time - whole * ladder.stepLength;
	const terms = [charge];
	for (let p = 1; p <= DEGREE; p++) terms.push(times(ladder.matrix, terms[p - 1]).map((v) => (v * rest) / p));
	const steps = [charge.map((_, i) => terms.reduce((sum, term) => sum + term[i], 0))];
	ladder.powers.forEach((power, j) => {
		const before = steps[j];
		steps.push(Math.floor(whole / 2 ** j) % 2 === 1 ? times(power, before) : before);
	});
	return { whole, rest, terms, steps };
}

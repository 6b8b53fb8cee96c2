/**
 * Divided differences of e^{λt} over all pairs of rates at one time:
 *
 *     φ_ij = (e^{λ_i t} − e^{λ_j t}) / (λ_i − λ_j),   φ_ii = t e^{λ_i t}
 *
 * formed as e^{λ_j t} · expm1((λ_i − λ_j) t) / (λ_i − λ_j), so that near rates lose nothing.
 * Source: A. McCurdy, K. C. Ng and B. N. Parlett, Math. Comp. 43 (1984) 501.
 */

export interface PairTable {
	n: number;
	/** e^{λ_j t} */
	expRe: Float64Array;
	expIm: Float64Array;
	/** φ_ij, row-major, symmetric. */
	re: Float64Array;
	im: Float64Array;
}

export function pairTable(n: number): PairTable {
	return {
		n,
		expRe: new Float64Array(n),
		expIm: new Float64Array(n),
		re: new Float64Array(n * n),
		im: new Float64Array(n * n)
	};
}

/** Fills the table for the rates λ at time t ≥ 0. */
export function fillPairs(
	table: PairTable,
	lambdaRe: Float64Array,
	lambdaIm: Float64Array,
	timeS: number
): void {
	const { n, expRe, expIm, re, im } = table;
	for (let j = 0; j < n; j++) {
		const decay = Math.exp(lambdaRe[j] * timeS);
		const angle = lambdaIm[j] * timeS;
		expRe[j] = angle === 0 ? decay : decay * Math.cos(angle);
		expIm[j] = angle === 0 ? 0 : decay * Math.sin(angle);
	}
	for (let i = 0; i < n; i++) {
		re[i * n + i] = timeS * expRe[i];
		im[i * n + i] = timeS * expIm[i];
		for (let j = 0; j < i; j++) {
			// The slower one outside, so that the difference of exponents has a real part ≤ 0 and cannot overflow.
			const [slow, fast] = lambdaRe[i] > lambdaRe[j] ? [i, j] : [j, i];
			pair(table, slow, fast, lambdaRe[fast] - lambdaRe[slow], lambdaIm[fast] - lambdaIm[slow], timeS);
		}
	}
}

function pair(
	table: PairTable,
	slow: number,
	fast: number,
	gapRe: number,
	gapIm: number,
	timeS: number
): void {
	const { n, expRe, expIm, re, im } = table;
	const a = fast * n + slow;
	const b = slow * n + fast;
	if (gapRe === 0 && gapIm === 0) {
		re[a] = re[b] = timeS * expRe[slow];
		im[a] = im[b] = timeS * expIm[slow];
		return;
	}
	const x = gapRe * timeS;
	const angle = gapIm * timeS;
	let riseRe = Math.expm1(x);
	let riseIm = 0;
	if (angle !== 0) {
		const half = Math.sin(angle / 2);
		riseIm = (riseRe + 1) * Math.sin(angle);
		riseRe = riseRe * Math.cos(angle) - 2 * half * half;
	}
	const square = gapRe * gapRe + gapIm * gapIm;
	const quotientRe = gapIm === 0 ? riseRe / gapRe : (riseRe * gapRe + riseIm * gapIm) / square;
	const quotientIm = gapIm === 0 ? 0 : (riseIm * gapRe - riseRe * gapIm) / square;
	re[a] = re[b] = expRe[slow] * quotientRe - expIm[slow] * quotientIm;
	im[a] = im[b] = expRe[slow] * quotientIm + expIm[slow] * quotientRe;
}

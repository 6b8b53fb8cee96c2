/**
 * The closed form of a lower triangular system dy/dt = T y, groups of (nearly) equal rates included.
 *
 * Each y_i is a sum over groups g of e^{μ_g t} times a polynomial; taken in order, y_i′ = λ_i y_i + Σ_k T_ik y_k with
 * everything on the right already known:
 *
 *     other groups   Q′ + (μ_g − λ_i) Q = P          →  Q_m = (P_m − (m+1) Q_{m+1}) / (μ_g − λ_i), from the top
 *     own group      R′ = δ_i R + P, δ_i = λ_i − μ_g  →  R_{m+1} = (δ_i R_m + P_m) / (m+1), R_0 = y_i(0) − Σ Q_0
 *
 * With all rates distinct this is the classical product form of H. Bateman, Proc. Camb. Phil. Soc. 15 (1910) 423. Beside each
 * coefficient runs the sum of absolute values that it was made of, which bounds its rounding.
 *
 * | symbol | name here |
 * | --- | --- |
 * | coefficient of t^m e^{μ_g t} in y_i | `re/im[i·width + offset[g] + m]` |
 * | its sum of absolute values | `size[i·width + offset[g] + m]` |
 */
import type { ModeGroup } from './mode-groups';
import type { ModeSpace } from './mode-space';
import { Scratch } from './scratch';

export interface ModeCoefficients {
	width: number;
	offset: Int32Array;
	re: Float64Array;
	im: Float64Array;
	size: Float64Array;
}

/**
 * Coefficients of every mode for one charge.
 * @param scratch memory for them, where they are not kept
 */
export function triangularModes(
	space: ModeSpace,
	groups: ModeGroup[],
	groupOf: Int32Array,
	charge: ArrayLike<number>,
	scratch = new Scratch()
): ModeCoefficients {
	const { n } = space;
	const offset = new Int32Array(groups.length + 1);
	groups.forEach((group, g) => (offset[g + 1] = offset[g] + group.degree + 1));
	const width = offset[groups.length];
	const own = scratch.zeros(3 * n * width);
	const part = (k: number) => own.subarray(k * n * width, (k + 1) * n * width);
	const result: ModeCoefficients = { width, offset, re: part(0), im: part(1), size: part(2) };
	const start = { re: 0, im: 0, size: 0 };
	for (let i = 0; i < n; i++) {
		gatherForcing(space, result, i);
		initialValue(space, charge, i, start);
		for (let g = 0; g < groups.length; g++)
			if (g !== groupOf[i]) particular(space, groups[g], result, i, offset[g], start);
		ownGroup(space, groups[groupOf[i]], result, i, offset[groupOf[i]], start);
	}
	return result;
}

/** Row i := Σ_k T_ik · row k, the forcing P of mode i. */
function gatherForcing({ n, t, tBound, complex }: ModeSpace, c: ModeCoefficients, i: number): void {
	const { width, re, im, size } = c;
	const row = i * width;
	for (let k = 0; k < i; k++) {
		const bound = tBound[i * n + k];
		if (bound === 0) continue;
		const tRe = t.re[i * n + k];
		const tIm = t.im[i * n + k];
		const other = k * width;
		for (let l = 0; l < width; l++) {
			re[row + l] += tRe * re[other + l];
			size[row + l] += bound * size[other + l];
		}
		if (!complex) continue;
		for (let l = 0; l < width; l++) {
			re[row + l] -= tIm * im[other + l];
			im[row + l] += tRe * im[other + l] + tIm * re[other + l];
		}
	}
}

interface Start {
	re: number;
	im: number;
	size: number;
}

function initialValue({ n, w, wBound }: ModeSpace, charge: ArrayLike<number>, i: number, start: Start): void {
	start.re = start.im = start.size = 0;
	for (let s = 0; s < n; s++) {
		start.re += w.re[i * n + s] * charge[s];
		start.im += w.im[i * n + s] * charge[s];
		start.size += wBound[i * n + s] * Math.abs(charge[s]);
	}
}

function particular(
	{ lambda }: ModeSpace,
	group: ModeGroup,
	{ width, re, im, size }: ModeCoefficients,
	i: number,
	offset: number,
	start: Start
): void {
	const base = i * width + offset;
	const dRe = group.re - lambda.re[i];
	const dIm = group.im - lambda.im[i];
	const square = dRe * dRe + dIm * dIm;
	const distance = dIm === 0 ? Math.abs(dRe) : Math.sqrt(square);
	for (let m = group.degree; m >= 0; m--) {
		const at = base + m;
		if (size[at] === 0 && (m === group.degree || size[at + 1] === 0)) continue;
		if (m < group.degree) {
			re[at] -= (m + 1) * re[at + 1];
			im[at] -= (m + 1) * im[at + 1];
			size[at] += (m + 1) * size[at + 1];
		}
		size[at] /= distance;
		if (dIm === 0) {
			re[at] /= dRe;
			im[at] /= dRe;
		} else {
			const value = re[at];
			re[at] = (value * dRe + im[at] * dIm) / square;
			im[at] = (im[at] * dRe - value * dIm) / square;
		}
	}
	start.re -= re[base];
	start.im -= im[base];
	start.size += size[base];
}

function ownGroup(
	{ lambda }: ModeSpace,
	group: ModeGroup,
	{ width, re, im, size }: ModeCoefficients,
	i: number,
	offset: number,
	start: Start
): void {
	const base = i * width + offset;
	const deltaRe = lambda.re[i] - group.re;
	const deltaIm = lambda.im[i] - group.im;
	const delta = deltaIm === 0 ? Math.abs(deltaRe) : Math.hypot(deltaRe, deltaIm);
	let { re: r, im: q, size: s } = start;
	for (let m = 0; m <= group.degree; m++) {
		const at = base + m;
		const nextRe = (deltaRe * r - deltaIm * q + re[at]) / (m + 1);
		const nextIm = (deltaRe * q + deltaIm * r + im[at]) / (m + 1);
		const nextSize = (delta * s + size[at]) / (m + 1);
		re[at] = r;
		im[at] = q;
		size[at] = s;
		[r, q, s] = [nextRe, nextIm, nextSize];
	}
}

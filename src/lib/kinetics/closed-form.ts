/**
 * The closed form of each species: amplitudes on the basis functions t^m e^{re t} {1 | cos im t, sin im t}.
 *
 *     c_s(t) = Σ_l A[s][l] φ_l(t)
 *
 * A mode with im > 0 stands for itself and its conjugate: 2 Re(a e^{(re + i im) t}) = 2 Re a · e^{re t} cos im t
 * − 2 Im a · e^{re t} sin im t. `size[s]` sums the absolute values that A[s][·] was made of, at each function's largest value
 * over t ≥ 0; rounding in c_s is some ε of it.
 *
 * | symbol | name here |
 * | --- | --- |
 * | φ_l | `basis()` fills them; `terms[]` says which they are |
 * | A (species × functions) | `amplitudes` |
 */
import type { ModeGroup } from './mode-groups';
import type { ModeSpace } from './mode-space';
import type { ModeCoefficients } from './triangular-modes';

export interface ClosedForm {
	n: number;
	/** Number of basis functions. */
	width: number;
	/** Per group that is kept (im ≥ 0). */
	re: Float64Array;
	im: Float64Array;
	degree: Int32Array;
	members: Int32Array;
	/** amplitudes[s·width + l] */
	amplitudes: Float64Array;
	/** Sums of absolute values, same shape. */
	sizes: Float64Array;
	/** Σ_l of sizes at the functions' largest values, per species. */
	size: Float64Array;
	/** True when all rates are real and simple: φ_l = e^{re_l t}. */
	simple: boolean;
}

export function closedForm(space: ModeSpace, groups: ModeGroup[], c: ModeCoefficients): ClosedForm {
	const { n } = space;
	const kept: number[] = [];
	let width = 0;
	for (let g = 0; g < groups.length; g++) {
		if (groups[g].im < 0) continue;
		kept.push(g);
		width += (groups[g].degree + 1) * (groups[g].im > 0 ? 2 : 1);
	}
	kept.sort((a, b) => groups[a].re - groups[b].re || groups[a].im - groups[b].im);
	const own = new Float64Array(2 * n * width);
	const form: ClosedForm = {
		n,
		width,
		re: new Float64Array(kept.length),
		im: new Float64Array(kept.length),
		degree: new Int32Array(kept.length),
		members: new Int32Array(kept.length),
		amplitudes: own.subarray(0, n * width),
		sizes: own.subarray(n * width),
		size: new Float64Array(n),
		simple: width === kept.length
	};
	kept.forEach((g, i) => {
		form.re[i] = groups[g].re;
		form.im[i] = groups[g].im;
		form.degree[i] = groups[g].degree;
		form.members[i] = groups[g].members.length;
	});
	let column = 0;
	for (const g of kept) {
		for (let m = 0; m <= groups[g].degree; m++) {
			projectTerm(space, c, c.offset[g] + m, form, column, groups[g].im > 0);
			column += groups[g].im > 0 ? 2 : 1;
		}
	}
	sumSizes(form);
	return form;
}

function projectTerm(
	{ n, v, vBound, complex }: ModeSpace,
	c: ModeCoefficients,
	term: number,
	form: ClosedForm,
	column: number,
	pair: boolean
): void {
	for (let s = 0; s < n; s++) {
		let re = 0;
		let im = 0;
		let size = 0;
		for (let i = 0; i < n; i++) {
			const bound = vBound[s * n + i];
			if (bound === 0) continue;
			const at = i * c.width + term;
			re += v.re[s * n + i] * c.re[at];
			size += bound * c.size[at];
			if (!complex) continue;
			re -= v.im[s * n + i] * c.im[at];
			im += v.re[s * n + i] * c.im[at] + v.im[s * n + i] * c.re[at];
		}
		const to = s * form.width + column;
		form.amplitudes[to] = pair ? 2 * re : re;
		form.sizes[to] = pair ? 2 * size : size;
		if (!pair) continue;
		form.amplitudes[to + 1] = -2 * im;
		form.sizes[to + 1] = 2 * size;
	}
}

/** Largest value over t ≥ 0 of each basis function: (m / (e |re|))^m for t^m e^{re t}. */
export function termPeaks(form: ClosedForm): Float64Array {
	const peaks = new Float64Array(form.width);
	let column = 0;
	for (let g = 0; g < form.re.length; g++)
		for (let m = 0; m <= form.degree[g]; m++) {
			const re = Math.abs(form.re[g]);
			const peak = m === 0 ? 1 : re === 0 ? Infinity : (m / (Math.E * re)) ** m;
			peaks[column++] = peak;
			if (form.im[g] > 0) peaks[column++] = peak;
		}
	return peaks;
}

function sumSizes(form: ClosedForm): void {
	const peaks = termPeaks(form);
	for (let s = 0, at = 0; s < form.n; s++)
		for (let l = 0; l < form.width; l++, at++)
			if (form.sizes[at] !== 0) form.size[s] += form.sizes[at] * peaks[l];
}

/** φ_l(t) into `out`. */
export function basis(form: ClosedForm, timeS: number, out: Float64Array): void {
	if (form.simple) {
		for (let l = 0; l < form.width; l++) out[l] = Math.exp(form.re[l] * timeS);
		return;
	}
	let column = 0;
	for (let g = 0; g < form.re.length; g++) {
		const decay = Math.exp(form.re[g] * timeS);
		const pair = form.im[g] > 0;
		let a = pair ? decay * Math.cos(form.im[g] * timeS) : decay;
		let b = pair ? decay * Math.sin(form.im[g] * timeS) : 0;
		for (let m = 0; m <= form.degree[g]; m++) {
			out[column++] = a;
			if (pair) out[column++] = b;
			a *= timeS;
			b *= timeS;
		}
	}
}

/** φ_l′(t) into `out`, from φ_l(t) in `phi`: (t^m e^{re t})′ = re t^m e^{re t} + m t^{m−1} e^{re t}, and the turning of pairs. */
export function basisSlope(form: ClosedForm, phi: Float64Array, out: Float64Array): void {
	let column = 0;
	for (let g = 0; g < form.re.length; g++) {
		const pair = form.im[g] > 0;
		for (let m = 0; m <= form.degree[g]; m++) {
			const before = pair ? column - 2 : column - 1;
			out[column] = form.re[g] * phi[column] + (m > 0 ? m * phi[before] : 0);
			if (pair) {
				out[column] -= form.im[g] * phi[column + 1];
				out[column + 1] =
					form.re[g] * phi[column + 1] + form.im[g] * phi[column] + (m > 0 ? m * phi[before + 1] : 0);
			}
			column += pair ? 2 : 1;
		}
	}
}

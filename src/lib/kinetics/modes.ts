/**
 * The modes as the page shows them: rate, time constant, half-life and amplitudes of each mode of the closed form.
 *
 *     τ = −1/Re λ,   t½ = ln 2 / |Re λ|          (Infinity where Re λ is zero, or a slow rate lost in rounding above it)
 *
 * | symbol | name here |
 * | --- | --- |
 * | λ | `re`, `im`, 1/s |
 * | τ, t½ | `timeConstantS`, `halfLifeS` |
 *
 * Source: linear systems with constant coefficients; G. H. Golub and C. F. Van Loan, Matrix Computations, 4th ed., 2013, 9.3.
 */
import type { ClosedForm } from './closed-form';
import type { Mode } from './types';

export function modesOf(form: ClosedForm): Mode[] {
	const modes: Mode[] = [];
	let column = 0;
	for (let g = 0; g < form.re.length; g++) {
		const count = (form.degree[g] + 1) * (form.im[g] > 0 ? 2 : 1);
		const amplitudes = Array.from({ length: count }, (_, m) =>
			Float64Array.from({ length: form.n }, (_, s) => form.amplitudes[s * form.width + column + m])
		);
		column += count;
		const re = form.re[g];
		modes.push({
			re,
			im: form.im[g],
			multiplicity: form.members[g],
			timeConstantS: re < 0 ? -1 / re : Infinity,
			halfLifeS: re < 0 ? Math.LN2 / -re : Infinity,
			amplitudes: withoutEmptyTail(amplitudes, form.im[g] > 0 ? 2 : 1)
		});
	}
	return modes;
}

/** Powers of t that no species has are not part of the formula. */
function withoutEmptyTail(amplitudes: Float64Array[], step: number): Float64Array[] {
	let length = amplitudes.length;
	const empty = (a: Float64Array) => a.every((value) => value === 0);
	while (length > step && amplitudes.slice(length - step, length).every(empty)) length -= step;
	return amplitudes.slice(0, length);
}

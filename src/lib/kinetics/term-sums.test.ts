import { describe, expect, it } from 'vitest';
import type { ClosedForm } from './closed-form';
import { random } from './bench/families';
import { TermSums } from './term-sums';

/** A closed form of random amplitudes, about `share` of them zero, with `still` modes of rate zero. */
function formOf(n: number, width: number, still: number, share: number, seed: number): ClosedForm {
	const next = random(seed);
	const amplitudes = new Float64Array(n * width).map(() => (next() < share ? 0 : 2 * next() - 1));
	const re = new Float64Array(width).map((_, l) => (l >= width - still ? 0 : -1 - l));
	return {
		n,
		width,
		re,
		im: new Float64Array(width),
		degree: new Int32Array(width),
		members: new Int32Array(width).fill(1),
		amplitudes,
		sizes: amplitudes.map(Math.abs),
		size: new Float64Array(n),
		simple: true
	};
}

/** The sums as their definition says, one value after another. */
function plainly(form: ClosedForm, fine: Float64Array, coarse: Float64Array, rows: number): number[] {
	const values: number[] = [];
	for (let j = 0; j < rows; j++)
		for (let s = 0; s < form.n; s++) {
			let sum = 0;
			for (let l = 0; l < form.width; l++)
				sum += form.amplitudes[s * form.width + l] * coarse[l] * fine[j * form.width + l];
			values.push(sum);
		}
	return values;
}

/** Largest difference between the passes and the definition, and whether anything outside the rows was touched. */
function compare(form: ClosedForm, rows: number): { worst: number; outside: number[] } {
	const { n, width } = form;
	const next = random(n + width);
	const decay = (l: number) => (form.re[l] === 0 ? 1 : next());
	const fine = new Float64Array(rows * width).map((_, i) => decay(i % width));
	const coarse = new Float64Array(width).map((_, l) => decay(l));
	const out = new Float64Array(2 + rows * n + 2).fill(7);
	new TermSums(form).write({ fine, coarse: Float64Array.of(9, ...coarse), place: 1 }, out, 2, rows);
	const expected = plainly(form, fine, coarse, rows);
	const worst = expected.reduce((top, value, i) => Math.max(top, Math.abs(out[2 + i] - value)), 0);
	return { worst, outside: [...out.subarray(0, 2), ...out.subarray(2 + rows * n)] };
}

describe('sums of terms in passes', () => {
	it('are those of the definition for any number of species and modes, zeros and standing parts', () => {
		for (let n = 1; n <= 8; n++)
			for (let width = 1; width <= 8; width++)
				for (const still of [0, 1, width])
					for (const share of [0, 0.5, 1]) {
						const form = formOf(n, width, still, share, 100 * n + 10 * width + still);
						const name = `${n} species, ${width} modes, ${still} standing, ${share} zero`;
						const { worst, outside } = compare(form, 5);
						expect(worst, name).toBeLessThan(1e-14 * width);
						expect(outside, name).toEqual([7, 7, 7, 7]);
					}
	});

	it('hold where a reactant and its first product have one mode each, as down a chain', () => {
		for (let n = 4; n <= 11; n++)
			for (const shared of [true, false]) {
				const form = formOf(n, n, 1, 0, n);
				for (let s = 0; s < n; s++) for (let l = 0; l < n - 1; l++) if (l > s) form.amplitudes[s * n + l] = 0;
				// the second species with its own mode alone, or with that of the first and a standing part
				form.amplitudes[n + (shared ? 1 : 0)] = 0;
				const { worst, outside } = compare(form, 7);
				expect(worst, `${n} species`).toBeLessThan(1e-14 * n);
				expect(outside).toEqual([7, 7, 7, 7]);
			}
	});
});

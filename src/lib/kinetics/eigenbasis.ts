/**
 * Full eigenvectors of K where all coupled rates are well apart: K = X Λ Y, Y = X⁻¹.
 *
 * From the lower triangular system of `mode-space.ts`, T Z = Z Λ by substitution (Z unit lower triangular), X = V Z,
 * Y = Z⁻¹ W:
 *
 *     Z_ij = Σ_{j≤l<i} T_il Z_lj / (λ_j − λ_i),   (Z⁻¹)_ij = −Σ_{j≤l<i} Z_il (Z⁻¹)_lj
 *
 * Null where rates nearly coincide or where the basis would cost too many digits; the caller then takes a way that needs no
 * eigenvectors. Source: G. H. Golub and C. F. Van Loan, Matrix Computations, 4th ed., 2013, section 7.6.
 */
import { blockWeights } from './block-weights';
import { components } from './components';
import { modeGroups } from './mode-groups';
import { modeSpace, type ModeSpace } from './mode-space';
import type { ComplexMatrix } from './schur';
import type { LinearSystem } from './types';

export interface Eigenbasis {
	n: number;
	lambda: { re: Float64Array; im: Float64Array };
	/** Species × mode. */
	x: ComplexMatrix;
	/** Mode × species. */
	y: ComplexMatrix;
	/** Z⁻¹, which takes vectors of the mode space to the eigenbasis. */
	zInverse: ComplexMatrix;
	space: ModeSpace;
	/** True when a component is in no detailed balance, so that its rates have no relative accuracy. */
	general: boolean;
	/** max over i, k of Σ_j |X_ij| |Y_jk|: the factor by which rounding grows. */
	growth: number;
}

/** Largest growth of rounding that is accepted. */
const LARGEST_GROWTH = 2e3;

export function eigenbasis(system: LinearSystem): Eigenbasis | null {
	const parts = components(system);
	const space = modeSpace(system, parts, blockWeights(system, parts));
	if (!space.usable || modeGroups(space).groups.some((group) => group.members.length > 1)) return null;
	const z = triangularVectors(space);
	const x = product(space.v, z);
	const zInverse = inverseOfUnitLower(z);
	const y = product(zInverse, space.w);
	const rise = growth(x, y);
	if (!(rise <= LARGEST_GROWTH)) return null;
	return {
		n: space.n,
		lambda: space.lambda,
		x,
		y,
		zInverse,
		space,
		general: space.kinds.includes('general'),
		growth: rise
	};
}

function empty(m: number): ComplexMatrix {
	return { m, re: new Float64Array(m * m), im: new Float64Array(m * m) };
}

function triangularVectors({ n, t, lambda }: ModeSpace): ComplexMatrix {
	const z = empty(n);
	for (let j = 0; j < n; j++) {
		z.re[j * n + j] = 1;
		for (let i = j + 1; i < n; i++) {
			let re = 0;
			let im = 0;
			for (let l = j; l < i; l++) {
				const a = i * n + l;
				const b = l * n + j;
				re += t.re[a] * z.re[b] - t.im[a] * z.im[b];
				im += t.re[a] * z.im[b] + t.im[a] * z.re[b];
			}
			if (re === 0 && im === 0) continue;
			const dRe = lambda.re[j] - lambda.re[i];
			const dIm = lambda.im[j] - lambda.im[i];
			const square = dRe * dRe + dIm * dIm;
			z.re[i * n + j] = (re * dRe + im * dIm) / square;
			z.im[i * n + j] = (im * dRe - re * dIm) / square;
		}
	}
	return z;
}

function inverseOfUnitLower(z: ComplexMatrix): ComplexMatrix {
	const { m } = z;
	const u = empty(m);
	for (let j = 0; j < m; j++) {
		u.re[j * m + j] = 1;
		for (let i = j + 1; i < m; i++)
			for (let l = j; l < i; l++) {
				const a = i * m + l;
				const b = l * m + j;
				u.re[i * m + j] -= z.re[a] * u.re[b] - z.im[a] * u.im[b];
				u.im[i * m + j] -= z.re[a] * u.im[b] + z.im[a] * u.re[b];
			}
	}
	return u;
}

function product(a: ComplexMatrix, b: ComplexMatrix): ComplexMatrix {
	const { m } = a;
	const c = empty(m);
	for (let i = 0; i < m; i++)
		for (let l = 0; l < m; l++) {
			const re = a.re[i * m + l];
			const im = a.im[i * m + l];
			if (re === 0 && im === 0) continue;
			for (let j = 0; j < m; j++) {
				c.re[i * m + j] += re * b.re[l * m + j] - im * b.im[l * m + j];
				c.im[i * m + j] += re * b.im[l * m + j] + im * b.re[l * m + j];
			}
		}
	return c;
}

function growth(x: ComplexMatrix, y: ComplexMatrix): number {
	const { m } = x;
	let worst = 0;
	for (let i = 0; i < m; i++)
		for (let k = 0; k < m; k++) {
			let sum = 0;
			for (let j = 0; j < m; j++)
				sum += Math.hypot(x.re[i * m + j], x.im[i * m + j]) * Math.hypot(y.re[j * m + k], y.im[j * m + k]);
			if (!(sum <= worst)) worst = sum;
		}
	return worst;
}

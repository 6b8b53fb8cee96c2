/**
 * The terms of one species' curve, from the modes, and their sum in a notation.
 *
 *     t^m e^{re t}: largest |c| (m/(e |re|))^m over t ≥ 0      terms below the chosen digits of the largest one are dropped
 *
 * | symbol | name here |
 * | --- | --- |
 * | c | `Term.coefficients` |
 * | that maximum | `Term.peak`, `peakOf` |
 *
 * Source: the maximum of t^m e^{−kt} is at t = m/k.
 */
import type { Style } from './formula-styles';
import type { Mode } from './types';

/** One mode as it acts on one species, time in the chosen unit. */
interface Term {
	re: number;
	im: number;
	/** Coefficients of t^m (real modes), or of t^m cos and t^m sin in turn (complex pairs). */
	coefficients: number[];
	/** Largest contribution over t ≥ 0. */
	peak: number;
}

export function allTerms(modes: readonly Mode[], species: number, unitS: number): Term[] {
	const terms = modes.map((mode) => termOf(mode, species, unitS)).filter((term) => term.peak > 0);
	return terms.sort((a, b) => b.re - a.re);
}

export function visibleTerms(modes: readonly Mode[], species: number, unitS: number, digits: number): Term[] {
	const terms = allTerms(modes, species, unitS);
	const limit = terms.reduce((top, term) => Math.max(top, term.peak), 0) * 10 ** -(digits + 1);
	return terms
		.filter((term) => term.peak > limit)
		.map((term) => ({ ...term, coefficients: withoutSmall(term, limit) }));
}

function termOf(mode: Mode, species: number, unitS: number): Term {
	const pair = mode.im > 0;
	const coefficients = mode.amplitudes.map((values, m) => values[species] * unitS ** (pair ? m >> 1 : m));
	const re = mode.re * unitS;
	const term = { re, im: mode.im * unitS, coefficients, peak: 0 };
	term.peak = coefficients.reduce((sum, c, m) => sum + peakOf(c, pair ? m >> 1 : m, re), 0);
	return term;
}

/** Largest |c t^m e^{re t}| over t ≥ 0; of a term that grows without limit, its slope. */
function peakOf(coefficient: number, power: number, re: number): number {
	if (power === 0 || re === 0) return Math.abs(coefficient);
	return Math.abs(coefficient) * (power / (Math.E * Math.abs(re))) ** power;
}

function withoutSmall(term: Term, limit: number): number[] {
	const pair = term.im > 0;
	const kept = term.coefficients.map((c, m) => (peakOf(c, pair ? m >> 1 : m, term.re) > limit ? c : 0));
	while (kept.length > 1 && kept[kept.length - 1] === 0) kept.pop();
	return kept;
}

export function written(terms: Term[], style: Style): string {
	if (terms.length === 0) return '0';
	return terms.map((term, i) => signed(termText(term, style), i === 0, style)).join('');
}

interface Signed {
	negative: boolean;
	body: string;
}

function signed({ negative, body }: Signed, first: boolean, style: Style): string {
	if (first) return negative ? style.minus + body : body;
	return ` ${negative ? style.minus : '+'} ${body}`;
}

function termText(term: Term, style: Style): Signed {
	const pieces = term.im > 0 ? wavePieces(term, style) : powerPieces(term, style);
	const factor = term.re === 0 ? '' : style.exponential(style.number(Math.abs(term.re)));
	if (pieces.length === 1) {
		const [{ negative, body }] = pieces;
		const bare = body === style.number(1) && factor !== '';
		return { negative, body: factor ? (bare ? factor : body + style.times + factor) : body };
	}
	const sum = pieces.map((piece, i) => signed(piece, i === 0, style)).join('');
	if (!factor) return { negative: false, body: sum };
	return { negative: false, body: style.open + sum + style.close + style.times + factor };
}

function powerPieces(term: Term, style: Style): Signed[] {
	return term.coefficients.flatMap((c, m) =>
		c === 0 ? [] : [{ negative: c < 0, body: style.power(style.number(Math.abs(c)), m) }]
	);
}

function wavePieces(term: Term, style: Style): Signed[] {
	const rate = style.number(term.im);
	return term.coefficients.flatMap((c, l) => {
		if (c === 0) return [];
		const amplitude = style.power(style.number(Math.abs(c)), l >> 1);
		return [
			{ negative: c < 0, body: amplitude + style.times + style.wave(l % 2 === 0 ? 'cos' : 'sin', rate) }
		];
	});
}

/**
 * Each species' curve as a formula: plain text, LaTeX, and a spreadsheet cell.
 *
 *     [A](t) = 0.25 + 0.75 e^(−0.4 t)                         distinct real modes
 *     [B](t) = (0.1 + 0.3 t) e^(−0.4 t)                       repeated modes
 *     [C](t) = 1/3 + e^(−1.5 t) (0.67 cos 0.866 t + …)        complex pairs
 *
 * Time is in the unit that the reader chose. A term is dropped when it stays below the chosen digits of the species' largest
 * term; nothing else is merged or rounded away. Spreadsheet formulas carry 17 digits and use EXP, COS, SIN alone.
 *
 * | symbol | name here |
 * | --- | --- |
 * | amplitude of t^m e^{re t}{cos, sin} | `Mode.amplitudes` |
 * | seconds in the time unit | `TIME_UNITS_S` |
 */
import type { Mode, Solution } from './types';
import { fromSi } from './units';

export type TimeUnit = 's' | 'min' | 'h' | 'd';

export interface FormulaOptions {
	timeUnit: TimeUnit;
	/** Significant digits of amplitudes and rates in text and LaTeX; 4 when left out. */
	digits?: number;
	/** Symbol of each species, in species order; "c1", "c2", … when left out. */
	symbols?: readonly string[];
	/** Cell that holds the time, in the chosen unit, for the spreadsheet formula; "A2" when left out. */
	timeCell?: string;
}

export interface SpeciesFormula {
	symbol: string;
	text: string;
	latex: string;
	/** Begins with "=". */
	spreadsheet: string;
	/**
	 * Largest difference between the formula, worked out in ordinary double precision, and the solution, as a fraction of the
	 * total charge. Where it is above 1e-6 the modes could not be told apart: the formula is then empty and `note` says so.
	 */
	error: number;
	note: string | null;
}

/** Difference above which a formula is not shown. */
const USELESS = 1e-6;
/** Difference above which a shown formula carries a note. */
const NOTED = 1e-11;

/** One mode as it acts on one species, time in the chosen unit. */
interface Term {
	re: number;
	im: number;
	/** Coefficients of t^m (real modes), or of t^m cos and t^m sin in turn (complex pairs). */
	coefficients: number[];
	/** Largest contribution over t ≥ 0. */
	peak: number;
}

/** Formulas of every species of a solution, in species order. */
export function formulas(solution: Solution, options: FormulaOptions): SpeciesFormula[] {
	const unitS = 1 / fromSi(1, options.timeUnit, 'time');
	const errors = formulaErrors(solution);
	return Array.from({ length: solution.n }, (_, s) => {
		const symbol = options.symbols?.[s] ?? `c${s + 1}`;
		if (!(errors[s] <= USELESS))
			return { symbol, text: '', latex: '', spreadsheet: '', error: errors[s], note: NO_FORMULA };
		return {
			...speciesFormula(solution.modes, s, symbol, unitS, options),
			error: errors[s],
			note: noteOn(errors[s])
		};
	});
}

const NO_FORMULA =
	'The modes of this scheme cannot be told apart in ordinary precision, so no formula is shown; the curve is computed without them.';

function noteOn(error: number): string | null {
	if (error <= NOTED) return null;
	return `The terms of this formula nearly cancel: worked out in ordinary precision it is right to ${error.toExponential(0)} of the charge. The curve itself is computed without that loss.`;
}

function speciesFormula(
	modes: readonly Mode[],
	s: number,
	symbol: string,
	unitS: number,
	options: FormulaOptions
) {
	const digits = options.digits ?? 4;
	const terms = visibleTerms(modes, s, unitS, digits);
	return {
		symbol,
		text: `[${symbol}](t) = ${written(terms, textStyle(digits))}`,
		latex: `\\left[\\mathrm{${escapeLatex(symbol)}}\\right](t) = ${written(terms, latexStyle(digits))}`,
		spreadsheet: `=${written(allTerms(modes, s, unitS), sheetStyle(options.timeCell ?? 'A2'))}`
	};
}

/** Per species, at times spread over the modes. */
function formulaErrors(solution: Solution): Float64Array {
	const errors = new Float64Array(solution.n);
	const total = solution.charge.reduce((sum, value) => sum + Math.abs(value), 0) || 1;
	const times = solution.modes.flatMap((mode) =>
		mode.re === 0 ? [] : [0.1, 1, 5].map((f) => f * mode.timeConstantS)
	);
	for (const timeS of times) {
		const truth = solution.at(timeS);
		for (let s = 0; s < solution.n; s++) {
			const error = Math.abs(evaluate(solution.modes, s, timeS) - truth[s]) / total;
			if (!(error <= errors[s])) errors[s] = error;
		}
	}
	return errors;
}

function evaluate(modes: readonly Mode[], s: number, timeS: number): number {
	let sum = 0;
	for (const mode of modes) {
		const pair = mode.im > 0;
		const decay = Math.exp(mode.re * timeS);
		mode.amplitudes.forEach((values, m) => {
			if (values[s] === 0) return;
			const turn = !pair ? 1 : m % 2 === 0 ? Math.cos(mode.im * timeS) : Math.sin(mode.im * timeS);
			sum += values[s] * timeS ** (pair ? m >> 1 : m) * decay * turn;
		});
	}
	return sum;
}

function allTerms(modes: readonly Mode[], species: number, unitS: number): Term[] {
	const terms = modes.map((mode) => termOf(mode, species, unitS)).filter((term) => term.peak > 0);
	return terms.sort((a, b) => b.re - a.re);
}

function visibleTerms(modes: readonly Mode[], species: number, unitS: number, digits: number): Term[] {
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

/** How the pieces of a formula are written in one notation. */
interface Style {
	minus: string;
	number: (value: number) => string;
	/** c · t^m, sign left out. */
	power: (coefficient: string, m: number) => string;
	exponential: (rate: string) => string;
	wave: (name: 'cos' | 'sin', angularRate: string) => string;
	times: string;
	open: string;
	close: string;
}

function written(terms: Term[], style: Style): string {
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

const SUPERSCRIPT = ['', '', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];

function textStyle(digits: number): Style {
	return {
		minus: '\u2212',
		number: (value) => shortNumber(value, digits),
		power: (c, m) => (m === 0 ? c : `${c} t${m < 10 ? SUPERSCRIPT[m] : `^${m}`}`),
		exponential: (rate) => `e^(\u2212${rate} t)`,
		wave: (name, rate) => `${name}(${rate} t)`,
		times: ' ',
		open: '(',
		close: ')'
	};
}

function latexStyle(digits: number): Style {
	const number = (value: number) => {
		const [mantissa, exponent] = shortNumber(value, digits).split('e');
		return exponent === undefined ? mantissa : `${mantissa} \\times 10^{${Number(exponent)}}`;
	};
	return {
		minus: '-',
		number,
		power: (c, m) => (m === 0 ? c : `${c}\\,t${m > 1 ? `^{${m}}` : ''}`),
		exponential: (rate) => `e^{-${rate}\\,t}`,
		wave: (name, rate) => `\\${name}\\left(${rate}\\,t\\right)`,
		times: '\\,',
		open: '\\left(',
		close: '\\right)'
	};
}

function sheetStyle(cell: string): Style {
	return {
		minus: '-',
		number: sheetNumber,
		power: (c, m) => (m === 0 ? c : `${c}*${cell}${m > 1 ? `^${m}` : ''}`),
		exponential: (rate) => `EXP(-${rate}*${cell})`,
		wave: (name, rate) => `${name.toUpperCase()}(${rate}*${cell})`,
		times: '*',
		open: '(',
		close: ')'
	};
}

function shortNumber(value: number, digits: number): string {
	if (value === 0) return '0';
	const size = Math.floor(Math.log10(value));
	if (size >= -4 && size < Math.max(digits, 6)) return String(Number(value.toPrecision(digits)));
	const [mantissa, exponent] = value.toExponential(digits - 1).split('e');
	return `${Number(mantissa)}e${Number(exponent)}`;
}

function sheetNumber(value: number): string {
	return String(value).toUpperCase().replace('E+', 'E');
}

function escapeLatex(symbol: string): string {
	return symbol.replace(/([_#%&{}$])/g, '\\$1');
}

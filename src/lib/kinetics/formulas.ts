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
 * | seconds in the time unit | `unitS` |
 *
 * Terms and their sum: `formula-terms.ts`; notations: `formula-styles.ts`. Source: the closed form of `solve.ts`.
 */
import { escapeLatex, latexStyle, sheetStyle, textStyle } from './formula-styles';
import { allTerms, visibleTerms, written } from './formula-terms';
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

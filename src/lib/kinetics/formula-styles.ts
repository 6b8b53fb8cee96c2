/**
 * The three notations of a formula: plain text, LaTeX, spreadsheet cell. How a sum of terms is put together: `formula-terms.ts`.
 *
 *     text          (0.1 + 0.3 t) e^(−0.4 t)
 *     LaTeX         \left(0.1 + 0.3\,t\right)\,e^{-0.4\,t}
 *     spreadsheet   (0.1+0.3*A2)*EXP(-0.4*A2), 17 digits, EXP, COS, SIN alone
 *
 * | symbol | name here |
 * | --- | --- |
 * | c t^m | `Style.power` |
 * | e^{−rate t} | `Style.exponential` |
 * | cos ωt, sin ωt | `Style.wave` |
 *
 * Source: shortest decimal that reads back as the same double, as ECMAScript defines it for numbers (ECMA-262, Number::toString).
 */

/** How the pieces of a formula are written in one notation. */
export interface Style {
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

const SUPERSCRIPT = ['', '', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];

export function textStyle(digits: number): Style {
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

export function latexStyle(digits: number): Style {
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

export function sheetStyle(cell: string): Style {
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

export function escapeLatex(symbol: string): string {
	return symbol.replace(/([_#%&{}$])/g, '\\$1');
}

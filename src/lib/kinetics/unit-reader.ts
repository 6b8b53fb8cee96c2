/**
 * Reads the text of a unit: a product of powers of known symbols, such as `L/(mol h)`, `s^-1`, `J mol-1 K-1`.
 *
 * Factors lead to s, mol, L, g, K, J. Exact by definition: BIPM, The International System of Units, 9th ed. (2019);
 * thermochemical calorie 4.184 J (ISO 80000-5).
 */

const BASES = ['time', 'amount', 'volume', 'mass', 'temperature', 'energy'] as const;
/** Powers of the base quantities, in the order of BASES. */
export type Powers = [number, number, number, number, number, number];

/** A unit as a factor to the engine's unit and powers of the base quantities. */
export interface UnitReading {
	factor: number;
	powers: Powers;
}

/** What each symbol stands for: factor to the engine's unit and the base quantity (index into BASES). */
const SYMBOLS: Record<string, [factor: number, base: number]> = {
	ms: [1e-3, 0],
	s: [1, 0],
	sec: [1, 0],
	min: [60, 0],
	h: [3600, 0],
	hr: [3600, 0],
	d: [86400, 0],
	day: [86400, 0],
	days: [86400, 0],
	mol: [1, 1],
	kmol: [1e3, 1],
	mmol: [1e-3, 1],
	umol: [1e-6, 1],
	nmol: [1e-9, 1],
	L: [1, 2],
	l: [1, 2],
	dL: [0.1, 2],
	mL: [1e-3, 2],
	ml: [1e-3, 2],
	uL: [1e-6, 2],
	m3: [1e3, 2],
	dm3: [1, 2],
	cm3: [1e-3, 2],
	kg: [1e3, 3],
	g: [1, 3],
	mg: [1e-3, 3],
	ug: [1e-6, 3],
	K: [1, 4],
	J: [1, 5],
	kJ: [1e3, 5],
	cal: [4.184, 5],
	kcal: [4184, 5]
};

/** Short words for concentrations that are products of symbols. */
const MOLAR: Record<string, number> = { M: 1, mM: 1e-3, uM: 1e-6, nM: 1e-9 };

const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹';

/** One spelling for the many ways in which signs, superscripts and spaces are typed. */
export function tidy(unit: string): string {
	return unit
		.trim()
		.replace(/[\u2212\u2013\u207b]/g, '-')
		.replace(/[⁰¹²³⁴⁵⁶⁷⁸⁹]/g, (digit) => String(SUPERSCRIPTS.indexOf(digit)))
		.replace(/[µμ]/g, 'u')
		.replace(/[·⋅×*]/g, ' ')
		.replace(/\s+/g, ' ');
}

/** Reads a product of powers such as `L/(mol h)`, `s^-1`, `J mol-1 K-1`; null when a symbol is unknown. */
export function readUnit(text: string): UnitReading | null {
	const tokens = text.match(/[A-Za-z]+3(?![\d.])|[A-Za-z]+|\^?\(?-?\d+(?:\.\d+)?\)?|[/()]/g);
	if (!tokens || tokens.join('').length !== text.replace(/ /g, '').length) return null;
	const reader = new UnitReader(text.replace(/ \/ /g, '/'));
	return reader.read();
}

/** Recursive descent over: product = factor { (' ' | '/') factor }, factor = (symbol | '(' product ')' | '1') [power]. */
class UnitReader {
	private position = 0;
	constructor(private readonly text: string) {}

	read(): UnitReading | null {
		const reading = this.product();
		return reading && this.position === this.text.length ? reading : null;
	}

	private product(): UnitReading | null {
		let left = this.factor();
		while (left && this.position < this.text.length && this.text[this.position] !== ')') {
			const operator = /[ /]/.test(this.text[this.position]) ? this.text[this.position++] : ' ';
			while (this.text[this.position] === ' ') this.position++;
			const right = this.factor();
			if (!right) return null;
			left = combine(left, right, operator === '/' ? -1 : 1);
		}
		return left;
	}

	private factor(): UnitReading | null {
		let base: UnitReading | null;
		if (this.text[this.position] === '(') {
			this.position++;
			base = this.product();
			if (this.text[this.position++] !== ')') return null;
		} else base = this.symbol();
		return base && raise(base, this.power());
	}

	private symbol(): UnitReading | null {
		const match = /^(?:1(?=[ /)]|$)|(?:m|dm|cm)3|[A-Za-z]+)/.exec(this.text.slice(this.position));
		if (!match) return null;
		this.position += match[0].length;
		return symbolReading(match[0]);
	}

	private power(): number {
		const match = /^\^?\(?(-?\d+(?:\.\d+)?)\)?/.exec(this.text.slice(this.position));
		if (!match) return 1;
		const opened = match[0].includes('(');
		const text = !opened && match[0].endsWith(')') ? match[0].slice(0, -1) : match[0];
		this.position += text.length;
		return Number(match[1]);
	}
}

function symbolReading(symbol: string): UnitReading | null {
	if (symbol === '1') return { factor: 1, powers: [0, 0, 0, 0, 0, 0] };
	if (Object.hasOwn(MOLAR, symbol)) return { factor: MOLAR[symbol], powers: [0, 1, -1, 0, 0, 0] };
	if (!Object.hasOwn(SYMBOLS, symbol)) return null;
	const [factor, base] = SYMBOLS[symbol];
	const powers = BASES.map((_, i) => (i === base ? 1 : 0)) as Powers;
	return { factor, powers };
}

function combine(a: UnitReading, b: UnitReading, sign: 1 | -1): UnitReading {
	const powers = a.powers.map((power, i) => power + sign * b.powers[i]) as Powers;
	return { factor: sign === 1 ? a.factor * b.factor : a.factor / b.factor, powers };
}

function raise(reading: UnitReading, power: number): UnitReading {
	if (power === 1) return reading;
	const powers = reading.powers.map((p) => p * power) as Powers;
	const factor = power < 0 ? 1 / reading.factor ** -power : reading.factor ** power;
	return { factor, powers };
}

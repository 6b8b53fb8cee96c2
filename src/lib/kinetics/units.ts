/**
 * Units at the edge of the engine.
 *
 * Problem: people write "0.794 1/h", "12 L/(mol·min)", "50 °C", "17.2 kcal/mol", "95 %"; inside, the engine knows only
 * s, mol/L, K, J/mol and 1/s. A unit text is read as a product of powers of known symbols, which gives a factor and the
 * powers of the base quantities (time, amount, volume, mass, temperature, energy). The powers must be those that the
 * dimension asked for has; nothing is guessed.
 *
 *     SI value = value · factor (+ offset, temperature alone)
 *
 * | symbol | name here |
 * | --- | --- |
 * | factor | `UnitReading.factor` |
 * | powers of time, amount, volume, mass, temperature, energy | `UnitReading.powers` |
 * | n of (mol/L)^n in a rate constant | `UnitContext.excessOrder` |
 *
 * Exact factors: BIPM, The International System of Units, 9th ed. (2019); thermochemical calorie 4.184 J (ISO 80000-5).
 * The litre is the unit of volume inside (concentrations in mol/L), the gram the unit of mass.
 */

export interface UnitQuantity {
	value: number;
	unit: string;
}

export type Dimension =
	| 'time'
	| 'rate constant'
	| 'concentration'
	| 'temperature'
	| 'molar energy'
	| 'molar entropy'
	| 'equilibrium constant'
	| 'fraction'
	| 'amount'
	| 'volume'
	| 'mass'
	| 'molar mass';

export interface UnitContext {
	/** Sum of the orders of the species in excess that multiply a rate constant; 0 when left out. */
	excessOrder?: number;
	/** Needed to read g/L as a concentration. */
	molarMassGPerMol?: number;
}

/** A unit that cannot be used where it stands. `accepted` lists what would be. */
export class UnitError extends Error {
	readonly code = 'unit-invalid';
	constructor(
		readonly found: string,
		readonly dimension: Dimension,
		readonly accepted: readonly string[],
		detail: string
	) {
		super(`${detail} A ${dimension} is expected here; accepted units: ${accepted.join(', ')}.`);
		this.name = 'UnitError';
	}
}

const BASES = ['time', 'amount', 'volume', 'mass', 'temperature', 'energy'] as const;
type Powers = [number, number, number, number, number, number];

interface UnitReading {
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

const RELATIVE: Record<string, number> = {
	'': 1,
	'1': 1,
	'-': 1,
	'%': 1e-2,
	'mol/mol': 1,
	'mol%': 1e-2,
	'mol %': 1e-2,
	'area%': 1e-2,
	'area %': 1e-2
};

const CELSIUS = new Set(['degC', '°C', 'C', 'celsius', '℃']);
const CELSIUS_ZERO_K = 273.15;

const POWERS: Record<Exclude<Dimension, 'rate constant' | 'equilibrium constant' | 'fraction'>, Powers> = {
	time: [1, 0, 0, 0, 0, 0],
	concentration: [0, 1, -1, 0, 0, 0],
	temperature: [0, 0, 0, 0, 1, 0],
	'molar energy': [0, -1, 0, 0, 0, 1],
	'molar entropy': [0, -1, 0, 0, -1, 1],
	amount: [0, 1, 0, 0, 0, 0],
	volume: [0, 0, 1, 0, 0, 0],
	mass: [0, 0, 0, 1, 0, 0],
	'molar mass': [0, -1, 0, 1, 0, 0]
};

/** Units offered in menus and named in errors, for each dimension. */
export function acceptedUnits(dimension: Dimension, context: UnitContext = {}): string[] {
	switch (dimension) {
		case 'time':
			return ['s', 'min', 'h', 'd'];
		case 'rate constant':
			return ['1/s', '1/min', '1/h', '1/d'].map((unit) => rateUnit(unit.slice(2), context.excessOrder ?? 0));
		case 'concentration':
			return ['mol/L', 'mmol/L', 'umol/L', 'g/L', 'mg/mL', '%'];
		case 'temperature':
			return ['degC', 'K'];
		case 'molar energy':
			return ['kJ/mol', 'J/mol', 'kcal/mol', 'cal/mol'];
		case 'molar entropy':
			return ['J/(mol K)', 'kJ/(mol K)', 'cal/(mol K)'];
		case 'equilibrium constant':
		case 'fraction':
			return ['1', '%'];
		case 'amount':
			return ['mol', 'mmol', 'kmol'];
		case 'volume':
			return ['L', 'mL', 'm3'];
		case 'mass':
			return ['kg', 'g', 'mg'];
		case 'molar mass':
			return ['g/mol', 'kg/mol', 'kg/kmol'];
	}
}

/** The unit of a rate constant whose rate law carries excess species of total order n: 1/h, L/(mol h), L^2/(mol^2 h). */
export function rateUnit(timeUnit: string, excessOrder: number): string {
	if (excessOrder === 0) return `1/${timeUnit}`;
	if (excessOrder === 1) return `L/(mol ${timeUnit})`;
	if (excessOrder === -1) return `mol/(L ${timeUnit})`;
	return excessOrder > 0
		? `L^${excessOrder}/(mol^${excessOrder} ${timeUnit})`
		: `mol^${-excessOrder}/(L^${-excessOrder} ${timeUnit})`;
}

/**
 * Converts to the engine's unit: s, 1/s·(L/mol)^n, mol/L, K, J/mol, J/(mol·K), 1, mol, L, g, g/mol.
 * @throws UnitError when the unit is missing, unknown or of another dimension, or the value is not a finite number.
 */
export function toSi(q: UnitQuantity, dimension: Dimension, context: UnitContext = {}): number {
	const scale = scaleOf(q?.unit, dimension, context);
	if (typeof q.value !== 'number' || !Number.isFinite(q.value))
		throw fail(q.unit, dimension, context, `${String(q.value)} is not a finite number.`);
	return scale.divide ? q.value / scale.divide : q.value * scale.factor + scale.offset;
}

/** Converts from the engine's unit to the unit asked for; the inverse of `toSi`. @throws UnitError */
export function fromSi(value: number, unit: string, dimension: Dimension, context: UnitContext = {}): number {
	const scale = scaleOf(unit, dimension, context);
	return scale.divide ? value * scale.divide : (value - scale.offset) / scale.factor;
}

/** True when the text is a unit of this dimension. */
export function isUnitOf(unit: string, dimension: Dimension, context: UnitContext = {}): boolean {
	try {
		scaleOf(unit, dimension, context);
		return true;
	} catch {
		return false;
	}
}

interface Scale {
	factor: number;
	offset: number;
	/** 1/factor where that is a whole number, so that 0.9/60 is one rounding and not two. */
	divide: number;
}

const scales = new Map<string, Scale>();

function scaleOf(unit: string | undefined, dimension: Dimension, context: UnitContext): Scale {
	const key = `${dimension}|${context.excessOrder ?? 0}|${context.molarMassGPerMol ?? ''}|${unit ?? ''}`;
	const known = scales.get(key);
	if (known) return known;
	const scale = readScale(unit, dimension, context);
	if (scales.size > 2000) scales.clear();
	scales.set(key, scale);
	return scale;
}

function readScale(unit: string | undefined, dimension: Dimension, context: UnitContext): Scale {
	if (typeof unit !== 'string') throw fail(String(unit), dimension, context, 'The unit is missing.');
	const text = tidy(unit);
	if (dimension === 'temperature' && CELSIUS.has(text)) return scaled(1, CELSIUS_ZERO_K);
	if (dimension === 'fraction' || dimension === 'equilibrium constant' || dimension === 'concentration') {
		if (Object.hasOwn(RELATIVE, text) && !(text === '' && dimension === 'concentration'))
			return scaled(RELATIVE[text]);
	}
	if (text === '') throw fail(unit, dimension, context, 'The unit is missing.');
	const reading = readUnit(text);
	if (!reading) throw fail(unit, dimension, context, `"${unit}" is not a unit known here.`);
	return matchPowers(unit, reading, dimension, context);
}

function matchPowers(unit: string, reading: UnitReading, dimension: Dimension, context: UnitContext): Scale {
	const asked = powersOf(dimension, context);
	if (asked && same(reading.powers, asked)) return scaled(reading.factor);
	if (dimension === 'concentration' && same(reading.powers, [0, 0, -1, 1, 0, 0])) {
		const mass = context.molarMassGPerMol;
		if (mass === undefined || !(mass > 0))
			throw fail(unit, dimension, context, `"${unit}" needs the molar mass of the species.`);
		return scaled(reading.factor / mass);
	}
	throw fail(unit, dimension, context, `"${unit}" is not a unit of ${article(dimension)}.`);
}

function powersOf(dimension: Dimension, context: UnitContext): Powers | null {
	if (dimension === 'equilibrium constant' || dimension === 'fraction') return null;
	if (dimension !== 'rate constant') return POWERS[dimension];
	const n = context.excessOrder ?? 0;
	return [-1, -n, n, 0, 0, 0];
}

function scaled(factor: number, offset = 0): Scale {
	const inverse = Math.round(1 / factor);
	const exact = inverse > 1 && Math.abs(inverse * factor - 1) < 4e-16;
	return { factor, offset, divide: exact && offset === 0 ? inverse : 0 };
}

const article = (dimension: Dimension) => (/^[aeiou]/.test(dimension) ? 'an ' : 'a ') + dimension;
const same = (a: Powers, b: Powers) => a.every((power, i) => Math.abs(power - b[i]) < 1e-12);

function fail(found: string, dimension: Dimension, context: UnitContext, detail: string): UnitError {
	return new UnitError(found, dimension, acceptedUnits(dimension, context), detail);
}

const SUPERSCRIPTS = '⁰¹²³⁴⁵⁶⁷⁸⁹';

/** One spelling for the many ways in which signs, superscripts and spaces are typed. */
function tidy(unit: string): string {
	return unit
		.trim()
		.replace(/[\u2212\u2013\u207b]/g, '-')
		.replace(/[⁰¹²³⁴⁵⁶⁷⁸⁹]/g, (digit) => String(SUPERSCRIPTS.indexOf(digit)))
		.replace(/[µμ]/g, 'u')
		.replace(/[·⋅×*]/g, ' ')
		.replace(/\s+/g, ' ');
}

/** Reads a product of powers such as `L/(mol h)`, `s^-1`, `J mol-1 K-1`; null when a symbol is unknown. */
function readUnit(text: string): UnitReading | null {
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

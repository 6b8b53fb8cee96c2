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
 * | factor, powers of the base quantities | `UnitReading` (`unit-reader.ts`) |
 * | n of (mol/L)^n in a rate constant | `UnitContext.excessOrder` |
 *
 * Exact factors: BIPM, The International System of Units, 9th ed. (2019); thermochemical calorie 4.184 J (ISO 80000-5).
 * The litre is the unit of volume inside (concentrations in mol/L), the gram the unit of mass.
 */

import { readUnit, tidy, type Powers, type UnitReading } from './unit-reader';

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

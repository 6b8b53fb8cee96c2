import { describe, expect, it } from 'vitest';
import { acceptedUnits, fromSi, isUnitOf, rateUnit, toSi, UnitError, type Dimension } from './units';

describe('reading units', () => {
	it.each<[number, string, Dimension, number]>([
		[2, 'min', 'time', 120],
		[1.5, 'h', 'time', 5400],
		[1, 'd', 'time', 86400],
		[3.6, '1/h', 'rate constant', 0.001],
		[3.6, 'h^-1', 'rate constant', 0.001],
		[3.6, 'h⁻¹', 'rate constant', 0.001],
		[3.6, 'h−1', 'rate constant', 0.001],
		[6, '1/min', 'rate constant', 0.1],
		[250, 'mmol/L', 'concentration', 0.25],
		[250, 'mM', 'concentration', 0.25],
		[0.25, 'mol L^-1', 'concentration', 0.25],
		[250, 'mol/m3', 'concentration', 0.25],
		[95, '%', 'concentration', 0.95],
		[50, 'degC', 'temperature', 323.15],
		[50, '°C', 'temperature', 323.15],
		[298.15, 'K', 'temperature', 298.15],
		[72, 'kJ/mol', 'molar energy', 72000],
		[10, 'kcal/mol', 'molar energy', 41840],
		[-50, 'J/(mol K)', 'molar entropy', -50],
		[-50, 'J mol-1 K-1', 'molar entropy', -50],
		[-50, 'J/mol/K', 'molar entropy', -50],
		[2.5, '1', 'equilibrium constant', 2.5],
		[15, '%', 'fraction', 0.15],
		[1.9, 'kg', 'mass', 1900]
	])('%d %s as %s', (value, unit, dimension, expected) => {
		expect(Math.abs(toSi({ value, unit }, dimension) / expected - 1)).toBeLessThan(3e-16);
	});
	it('reads rate constants with species in excess by their order', () => {
		expect(toSi({ value: 12, unit: 'L/(mol min)' }, 'rate constant', { excessOrder: 1 })).toBe(0.2);
		expect(toSi({ value: 12, unit: 'L/mol/min' }, 'rate constant', { excessOrder: 1 })).toBe(0.2);
		expect(toSi({ value: 12, unit: '1/(M min)' }, 'rate constant', { excessOrder: 1 })).toBe(0.2);
		expect(toSi({ value: 6, unit: 'L²/(mol² min)' }, 'rate constant', { excessOrder: 2 })).toBe(0.1);
		expect(toSi({ value: 6, unit: 'L^0.5/(mol^0.5 min)' }, 'rate constant', { excessOrder: 0.5 })).toBe(0.1);
		for (const order of [-1, 0, 1, 2])
			expect(isUnitOf(rateUnit('h', order), 'rate constant', { excessOrder: order })).toBe(true);
	});
	it('reads g/L with the molar mass, and asks for it', () => {
		expect(toSi({ value: 50, unit: 'g/L' }, 'concentration', { molarMassGPerMol: 200 })).toBe(0.25);
		expect(toSi({ value: 50, unit: 'mg/mL' }, 'concentration', { molarMassGPerMol: 200 })).toBeCloseTo(
			0.25,
			15
		);
		expect(() => toSi({ value: 50, unit: 'g/L' }, 'concentration')).toThrow(/molar mass/);
	});
	it('comes back to the number that went in', () => {
		for (const dimension of [
			'time',
			'rate constant',
			'concentration',
			'temperature',
			'molar energy'
		] as const)
			for (const unit of acceptedUnits(dimension)) {
				const context = { molarMassGPerMol: 214.2 };
				const there = toSi({ value: 0.794, unit }, dimension, context);
				expect(fromSi(there, unit, dimension, context)).toBeCloseTo(0.794, 13);
			}
	});
});

describe('refusing units', () => {
	it.each<[string, Dimension]>([
		['', 'time'],
		['', 'concentration'],
		['m', 'time'],
		['mol', 'rate constant'],
		['1/h', 'time'],
		['L/(mol h)', 'rate constant'],
		['kJ', 'molar energy'],
		['F', 'temperature'],
		['__proto__', 'concentration'],
		['constructor', 'time'],
		['1/(h', 'rate constant'],
		['h)', 'time'],
		['//h', 'rate constant'],
		['5 h', 'time']
	])('"%s" as %s', (unit, dimension) => {
		expect(() => toSi({ value: 1, unit }, dimension)).toThrow(UnitError);
	});
	it('names what was found and what is accepted', () => {
		expect(() => toSi({ value: 1, unit: 'fortnight' }, 'time')).toThrow(
			'"fortnight" is not a unit known here. A time is expected here; accepted units: s, min, h, d.'
		);
		expect(() => toSi({ value: 1, unit: undefined as unknown as string }, 'time')).toThrow(/unit is missing/);
		expect(() => toSi({ value: NaN, unit: 'h' }, 'time')).toThrow(/not a finite number/);
	});
});

/** Our small exact tables held against an independent unit library (mathjs), unit by unit. */
import { unit } from 'mathjs';
import { describe, expect, it } from 'vitest';
import { fromSi, toSi, type Dimension } from './units';

/** Ours, theirs, and the SI unit in which both are compared. The library has no "1/h per mol/L", so that is left to units.test.ts. */
const PAIRS: [Dimension, ours: string, theirs: string, si: string][] = [
	['time', 's', 's', 's'],
	['time', 'min', 'minute', 's'],
	['time', 'h', 'hour', 's'],
	['time', 'd', 'day', 's'],
	['rate constant', '1/min', 'minute^-1', 's^-1'],
	['rate constant', '1/h', 'hour^-1', 's^-1'],
	['rate constant', '1/d', 'day^-1', 's^-1'],
	['concentration', 'mmol/L', 'mmol / litre', 'mol / litre'],
	['molar energy', 'kJ/mol', 'kJ / mol', 'J / mol'],
	['temperature', 'degC', 'degC', 'K']
];

describe('units', () => {
	it.each(PAIRS)('of %s: %s agrees with mathjs', (dimension, ours, theirs, si) => {
		for (const value of [1e-9, 0.794, 1, 37.5, 86_400]) {
			const reference = unit(value, theirs).toNumber(si);
			const relative = Math.max(Math.abs(reference), 1e-30);
			expect(Math.abs(toSi({ value, unit: ours }, dimension) - reference) / relative).toBeLessThan(1e-14);
		}
	});

	it.each(PAIRS)('of %s: %s comes back as it went in', (dimension, ours) => {
		for (const value of [1e-9, 0.794, 1, 37.5, 86_400])
			expect(fromSi(toSi({ value, unit: ours }, dimension), ours, dimension)).toBeCloseTo(value, 9);
	});

	it('of energy: the thermochemical calorie is 4.184 J exactly (ISO 80000-5)', () => {
		expect(toSi({ value: 17.2, unit: 'kcal/mol' }, 'molar energy')).toBeCloseTo(17.2 * 4184, 9);
	});
});

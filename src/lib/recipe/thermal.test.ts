import { describe, expect, it } from 'vitest';
import published from '../../../tests/reference/c08_thermal_safety.json';
import { accumulation, adiabaticRise, arrheniusFactor, temperatureOrderClass } from './thermal';

describe('thermal figures for cautions', () => {
	// Constructed case of the four-temperature scheme: Tp 60 °C, MTT 101 °C, TD24 132 °C (computed apart).
	const rise = adiabaticRise(-140, 1.2, 1.9);
	it('gives the accumulation at the end of a constant dose', () => {
		expect(accumulation(1.5, 2)).toBeCloseTo(0.317, 3);
		expect(accumulation(1.5, 4)).toBeCloseTo(0.166, 3);
		expect(accumulation(0.4, 2)).toBeCloseTo(0.688, 3);
		expect(accumulation(1.3, 2)).toBeCloseTo(0.356, 3);
	});
	it('keeps its digits where little or nothing reacts during the dose', () => {
		expect(accumulation(0, 2)).toBe(1);
		expect(1 - accumulation(1e-12, 1)).toBeCloseTo(5e-13, 16);
	});
	it('puts the order of four temperatures into the published classes', () => {
		expect(rise).toBeCloseTo(88.4, 1);
		expect(temperatureOrderClass(60 + accumulation(1.5, 2) * rise, 101, 132)).toBe(1);
		expect(temperatureOrderClass(60 + rise, 101, 132)).toBe(4);
		expect(temperatureOrderClass(60 + accumulation(0.4, 2) * rise, 101, 132)).toBe(3);
		expect(temperatureOrderClass(90, 120, 100)).toBe(2);
		expect(temperatureOrderClass(150, 140, 100)).toBe(5);
		// Order of the classes as in Stoessel 2008, see the stored reference.
		expect(Object.keys(published.data.classes)).toHaveLength(5);
	});
	it('finds more accumulation in a colder batch', () => {
		const k45 = 1.5 * arrheniusFactor(72_000, 45, 60);
		expect(k45).toBeCloseTo(0.44, 2);
		expect(45 + accumulation(k45, 2) * rise).toBeCloseTo(103.8, 1);
		expect(temperatureOrderClass(45 + accumulation(k45, 2) * rise, 101, 132)).toBe(3);
	});
});

import { describe, expect, it } from 'vitest';
import { runContent, type RunContent } from './run';
import { asFitted, logSpan, usesLog, whyWords, withLogChoice } from './temperature-log';

const run = (readings: number[], useTemperatureLog?: boolean): RunContent =>
	runContent.parse({
		temperature: { value: 50, unit: 'degC' },
		temperatureLog: readings.map((celsius, time) => ({ time, celsius })),
		initial: { A: { value: 0.5, unit: 'mol/L' } },
		timeUnit: 'h',
		channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
		timepoints: [{ time: 0, values: { A: 0.5 } }],
		...(useTemperatureLog === undefined ? {} : { useTemperatureLog })
	});

describe('which temperature counts in a fit', () => {
	it('is the stated one while every reading lies within 1 °C of it', () => {
		expect(usesLog(run([49, 50.2, 51]))).toBe(false);
		expect(asFitted(run([49, 50.2, 51])).temperatureLog).toBeUndefined();
	});
	it('is the log once a reading leaves that range, on either side', () => {
		expect(usesLog(run([50, 51.01]))).toBe(true);
		expect(usesLog(run([48.9, 50]))).toBe(true);
		expect(asFitted(run([50, 57.3])).temperatureLog).toHaveLength(2);
	});
	it('is what a person chose, whatever the readings say', () => {
		expect(usesLog(run([50, 57.3], false))).toBe(false);
		expect(usesLog(run([50, 50.1], true))).toBe(true);
	});
	it('is the stated one where a single reading makes no program', () => {
		expect(logSpan(run([57.3]))).toBeNull();
		expect(usesLog(run([57.3], true))).toBe(false);
	});
	it('compares in one unit, where the run is stated in kelvin', () => {
		const kelvin = { ...run([50, 50.9]), temperature: { value: 323.15, unit: 'K' } };
		expect(logSpan(kelvin)).toMatchObject({ statedC: 50, farthestK: 0.9 });
	});
	it('is written out on the record, and only where there is a log', () => {
		expect(withLogChoice(run([50, 57.3]), undefined).useTemperatureLog).toBe(true);
		expect(withLogChoice(run([50, 57.3]), false).useTemperatureLog).toBe(false);
		expect(withLogChoice({ ...run([]), temperatureLog: undefined }, true).useTemperatureLog).toBeUndefined();
	});
	it('says why', () => {
		expect(whyWords(logSpan(run([49.9, 57.3]))!)).toContain('up to 7.3 °C from the stated 50 °C');
	});
});

import { describe, expect, it } from 'vitest';
import { runContent } from '$lib/schemas/run';
import { schemeContent } from '$lib/schemas/scheme';
import type { FitFinding } from '$lib/schemas/fit';
import { atReference, centreOf } from './reference';

const run = (celsius: number) =>
	runContent.parse({
		temperature: { value: celsius, unit: 'degC' },
		initial: { A: { value: 1, unit: 'mol/L' } },
		timeUnit: 'h',
		channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
		timepoints: []
	});
const runs = [30, 40, 50, 60].map(run);
const kJ = (value: number) => ({ value, unit: 'kJ/mol' });
const scheme = (celsius: number) =>
	schemeContent.parse({
		species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
		steps: [
			{
				id: 's1',
				reactant: 'A',
				products: [{ species: 'B' }],
				forward: { kRef: { value: 2, unit: '1/h' }, activationEnergy: { fit: true, guess: kJ(70) } },
				reverse: null
			},
			{
				id: 's2',
				reactant: 'B',
				products: [{ species: 'C' }],
				forward: { kRef: { value: 3, unit: '1/h' }, activationEnergy: kJ(50), form: 'eyring' },
				reverse: { equilibriumConstant: { value: 5, unit: '1' } }
			}
		],
		referenceTemperature: { value: celsius, unit: 'degC' }
	});

describe('the reference temperature of a fit over several temperatures', () => {
	it('is the centre 1/mean(1/T) where the scheme names one outside the studied range', () => {
		// Harmonic mean of 303.15, 313.15, 323.15 and 333.15 K: 317.75 K.
		expect(centreOf(runs)).toBe(44.6);
		const issues: FitFinding[] = [];
		const moved = atReference(scheme(25), runs, 'auto', issues);
		expect(moved.referenceTemperature).toEqual({ value: 44.6, unit: 'degC' });
		expect(issues.map((i) => i.code)).toEqual(['reference-centred']);
		// k(T') = k(T) exp(−(E/R)(1/T' − 1/T)) by hand.
		const gap = 1 / 317.75 - 1 / 298.15;
		expect(moved.steps[0].forward.kRef.value).toBeCloseTo(2 * Math.exp((-70000 / 8.31446261815324) * gap), 8);
		expect(moved.steps[1].forward.kRef.value).toBeCloseTo(
			3 * (317.75 / 298.15) * Math.exp((-50000 / 8.31446261815324) * gap),
			8
		);
		expect(moved.steps[1].reverse).toEqual({ equilibriumConstant: { value: 5, unit: '1' } });
	});

	it('stays the scheme’s where it lies inside, or where that is asked for', () => {
		const issues: FitFinding[] = [];
		expect(atReference(scheme(50), runs, 'auto', issues)).toEqual(scheme(50));
		expect(atReference(scheme(25), runs, 'scheme', issues)).toEqual(scheme(25));
		expect(issues).toEqual([]);
		expect(atReference(scheme(50), runs, 'centre', issues).referenceTemperature.value).toBe(44.6);
	});

	it('stays where no energy is fitted: nothing there is correlated', () => {
		const known = scheme(25);
		known.steps[0].forward.activationEnergy = kJ(70);
		expect(atReference(known, runs, 'auto', [])).toEqual(known);
	});
});

import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '$lib/schemas/fit';
import type { Fit } from '../database/models';
import { prefill, type PrefillInput } from './prefill';
import type { WindowFacts } from './window-facts';

const request = fitRequest.parse({
	species: [
		{ id: 'B', name: 'HX-22', molarMassGPerMol: 150 },
		{ id: 'D', name: 'HX-22d' }
	],
	steps: [
		{
			id: 's1',
			reactant: 'B',
			products: [{ species: 'D' }],
			forward: { kRef: { value: 2.1e-5, unit: '1/h' } }
		}
	],
	referenceTemperature: { value: 5, unit: 'degC' },
	runs: [
		{
			id: 'r1',
			temperature: { value: 5, unit: 'degC' },
			initial: { B: { value: 0.4, unit: 'mol/L' } },
			timeUnit: 'h',
			channels: [{ id: 'D', weights: { D: 1 }, unit: 'mol/L' }],
			timepoints: [{ time: 24, values: { D: 0.0002 } }]
		}
	]
});
const report = {
	studied: { temperatureC: [5, 5], chargeMolPerL: { B: [0.4, 0.4] }, lastTimeH: 24 }
} as unknown as FitReport;
const fit = { number: 3, request, report, inputHash: 'a'.repeat(64), engineVersion: '1.0.0' } as Fit;

const window = (facts: Partial<WindowFacts>): PrefillInput['window'] => ({
	number: 2,
	charge: {},
	facts: {
		temperatureC: 5,
		fromH: 0,
		toH: 47.6,
		fromBoundH: null,
		toBoundH: 37.8,
		fromBinds: '',
		toBinds: 'D NMT 0.10 % of charge',
		confidencePercent: 95,
		...facts
	}
});
const draft = (of: PrefillInput['window']) =>
	prefill({
		title: 'HX-22 hold',
		decision: 'How long may B wait at 5 °C?',
		criteria: [{ species: 'D', relation: 'NMT', limit: 0.1, unit: '% of charge' }],
		facts: { fit, schemeName: 'Scheme 1', schemeNumber: 1, runs: [] },
		window: of
	});

// Invented case: k 2.1e-5 1/h, one-sided 95 % upper limit 2.64e-5 1/h, limit 0.10 %: 47.6 h nominal, 37.8 h at the bound.
describe('the first draft of a recipe', () => {
	it('states a hold of 37.8 h as 37 h, at the one-sided bound, and says so', () => {
		const { hold } = draft(window({}));
		expect(hold).toMatchObject({ nominal: 47.6, bound: 37.8, stated: 37, notBefore: null });
		expect(hold?.basis).toMatch(/window 2, at the one-sided 95 % bound .* Rounded down/);
		expect(hold?.limits).toBe('D NMT 0.10 % of charge above');
	});
	it('rounds the earliest time up and takes it as the set-point, with the hold as the end of the range', () => {
		const { setPoints, hold } = draft(window({ fromH: 3, fromBoundH: 3.06, toH: 4.6, toBoundH: 3.97 }));
		expect(hold).toMatchObject({ notBefore: 3.1, stated: 3.9 });
		expect(setPoints.find((p) => p.kind === 'time')).toMatchObject({
			value: 3.1,
			par: [3.1, 3.9],
			unit: 'h'
		});
	});
	it('states nothing where the bounds leave no time at all', () => {
		const { hold, setPoints } = draft(window({ fromH: 3.84, fromBoundH: 4.26, toH: 4.64, toBoundH: 3.96 }));
		expect(hold).toMatchObject({ stated: null, notBefore: null });
		expect(hold?.basis).toMatch(/no time meets every criterion/);
		expect(setPoints.some((p) => p.kind === 'time')).toBe(false);
	});
	it('gives a hold without an end a beginning alone', () => {
		const { hold } = draft(window({ fromH: 8.73, fromBoundH: 8.86, toH: null, toBoundH: null }));
		expect(hold).toMatchObject({ stated: null, notBefore: 8.9 });
	});
	it('takes no charge from data that are shares of it, and reads g/L through the molar mass', () => {
		const charged = (value: number, unit: string) =>
			prefill({
				title: 'HX-22 hold',
				decision: 'How long may B wait at 5 °C?',
				criteria: [],
				facts: {
					fit: {
						...fit,
						request: {
							...request,
							runs: [{ ...request.runs[0], initial: { B: { value, unit } } }]
						}
					} as unknown as Fit,
					schemeName: 'Scheme 1',
					schemeNumber: 1,
					runs: []
				},
				window: null
			});
		const share = charged(100, '%');
		expect(share.setPoints.some((p) => p.kind === 'charge')).toBe(false);
		expect(share.charges).toEqual([]);
		expect(share.basis.studiedChargeMolPerL).toEqual({});
		expect(charged(60, 'g/L').setPoints.find((p) => p.kind === 'charge')).toMatchObject({ value: 0.4 });
	});
	it('says that no bound was computed when there is none', () => {
		expect(draft(window({ toBoundH: null })).hold).toMatchObject({ stated: 47, bound: null });
		expect(draft(window({ toBoundH: null })).hold?.basis).toMatch(/no bound was computed/);
		expect(draft(null).hold).toBeNull();
	});
});

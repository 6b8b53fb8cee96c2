import { describe, expect, it } from 'vitest';
import { fitRequest } from '../../schemas/fit';
import { predict } from './bands';
import { fit } from './fit';

/** Invented chain A → B → C; values from the formulas of a first-order chain, with a fixed scatter. */
const times = [0.3, 0.6, 1, 1.5, 2.5, 4, 6, 9];
const [k1, k2] = [0.8, 0.2];
const a = (t: number) => Math.exp(-k1 * t);
const b = (t: number) => (k1 / (k2 - k1)) * (Math.exp(-k1 * t) - Math.exp(-k2 * t));
const scatter = (i: number, j: number) => 0.003 * Math.sin(7 * i + 3 * j);

function request(
	charge: Record<string, unknown>,
	channels: { id: string; unit: string; weights: Record<string, number> }[],
	values: (t: number, i: number) => Record<string, number>,
	more: Record<string, unknown> = {}
) {
	const step = (id: string, from: string, to: string, k: number) => ({
		id,
		reactant: from,
		products: [{ species: to }],
		forward: { kRef: { value: k, unit: '1/h' } }
	});
	return fitRequest.parse({
		species: [
			{ id: 'A', molarMassGPerMol: 200 },
			{ id: 'B', molarMassGPerMol: 200 },
			{ id: 'C', molarMassGPerMol: 200 },
			{ id: 'N', role: 'reagent in excess' }
		],
		steps: [step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 0.1)],
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 50, unit: 'degC' },
				initial: charge,
				timeUnit: 'h',
				channels,
				timepoints: times.map((time, i) => ({ time, values: values(time, i) })),
				...more
			}
		],
		options: { starts: 4, profiles: false }
	});
}
const own = (unit: string, ids = ['A', 'B', 'C']) => ids.map((id) => ({ id, unit, weights: { [id]: 1 } }));

describe('shares of the charge', () => {
	const values = (t: number, i: number) => ({
		A: 100 * (a(t) + scatter(i, 0)),
		B: 100 * (b(t) + scatter(i, 1))
	});
	const channels = own('% of charge', ['A', 'B']);
	const moles = fit(request({ A: { value: 0.5, unit: 'mol/L' } }, channels, values));

	it.each([
		['g/L', { A: { value: 100, unit: 'g/L' } }],
		['mmol/L', { A: { value: 500, unit: 'mmol/L' } }],
		['mol/L beside a reagent in excess', { A: { value: 0.5, unit: 'mol/L' }, N: { value: 6, unit: 'mol/L' } }]
	])('give the same constants from a charge stated in %s', (_, charge) => {
		const report = fit(request(charge, channels, values));
		expect(report.weightedSsr / moles.weightedSsr).toBeCloseTo(1, 8);
		report.parameters.forEach((p, i) => expect(p.estimate / moles.parameters[i].estimate).toBeCloseTo(1, 8));
		expect(report.parameters[0].estimate).toBeCloseTo(k1, 1);
	});

	it('refer to the stated charge where the charge is fitted, so that it comes back in its own unit', () => {
		const report = fit(request({ A: { fit: true, guess: { value: 100, unit: 'g/L' } } }, channels, values));
		const charge = report.parameters.find((p) => p.id === 'r1.initial.A')!;
		expect(charge.unit).toBe('g/L');
		expect(Math.abs(charge.estimate - 100)).toBeLessThan(2);
	});
});

describe('curves shown beside the channels of a run', () => {
	it('area %: a species is its share of what the detector sees, counted once', () => {
		const asked = request({ A: { value: 0.5, unit: 'mol/L' } }, own('area %'), (t, i) => ({
			A: 100 * (a(t) + scatter(i, 0)),
			B: 100 * (b(t) + scatter(i, 1)),
			C: 100 * (1 - a(t) - b(t) + scatter(i, 2))
		}));
		const report = fit(asked);
		const [p1, p2] = report.parameters.map((p) => p.estimate);
		const { series } = predict(report, asked, asked.runs[0], times);
		times.forEach((t, i) => {
			const at = (kind: string, id: string) => series.find((s) => s.kind === kind && s.id === id)!.curve[i];
			expect(at('channel', 'A')).toBeCloseTo(100 * Math.exp(-p1 * t), 8);
			const intermediate = (p1 / (p2 - p1)) * (Math.exp(-p1 * t) - Math.exp(-p2 * t));
			expect(at('channel', 'B')).toBeCloseTo(100 * intermediate, 8);
			for (const id of ['A', 'B', 'C']) expect(at('species', id)).toBeCloseTo(at('channel', id), 10);
		});
		const band = series.find((s) => s.kind === 'channel' && s.id === 'A')!;
		const alone = series.find((s) => s.kind === 'species' && s.id === 'A')!;
		band.confidence![1].forEach((v, i) => expect(alone.confidence![1][i]).toBeCloseTo(v, 10));
	});

	it('g/L: a species without a molar mass does not stand in the way of the others', () => {
		const asked = request({ A: { value: 100, unit: 'g/L' } }, own('g/L', ['A', 'B']), (t, i) => ({
			A: 100 * (a(t) + scatter(i, 0)),
			B: 100 * (b(t) + scatter(i, 1))
		}));
		const report = fit(asked);
		const { series } = predict(report, asked, asked.runs[0], [1]);
		const k = report.parameters[0].estimate;
		expect(series.find((s) => s.kind === 'channel' && s.id === 'A')!.curve[0]).toBeCloseTo(
			100 * Math.exp(-k),
			8
		);
		expect(series.find((s) => s.id === 'N')!.unit).toBe('mol/L');
	});
});

describe('mass balance', () => {
	it('is held against the part of the charge that belongs to the conserved total', () => {
		const exact = (t: number) => ({ A: 0.5 * a(t), B: 0.5 * b(t), C: 0.5 * (1 - a(t) - b(t)) });
		const charge = { A: { value: 0.5, unit: 'mol/L' }, N: { value: 5, unit: 'mol/L' } };
		const { massBalance } = fit(request(charge, own('mol/L'), exact));
		expect(massBalance).toHaveLength(1);
		for (const { value } of massBalance[0].percent) expect(value).toBeCloseTo(100, 9);
	});
});

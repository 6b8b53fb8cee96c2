import { describe, expect, it } from 'vitest';
import type { FitReport } from '$lib/schemas/fit';
import type { SchemeContent } from '$lib/schemas/scheme';
import { fittedNames, headline, inPlainWords, localRun, parameterName, plainName, stepWords } from './words';

const scheme: SchemeContent = {
	species: [
		{ id: 'A', name: '' },
		{ id: 'B', name: '' },
		{ id: 'C', name: '' }
	],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: null
		},
		{
			id: 'x',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 2 }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: null
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' }
};

const report = (over: Partial<FitReport>): FitReport =>
	({ status: 'converged', message: '', findings: [], parameters: [], ...over }) as FitReport;

const fitted = (id: string, profile: [number | null, number | null] | null = [0.9, 1.1]) => ({
	id,
	estimate: 1,
	standardError: 0.05,
	ci95: [0.9, 1.1] as [number, number],
	profileCi95: profile,
	unit: '1/h',
	state: 'fitted' as const
});

describe('names of parameters', () => {
	it('number a constant by the place of its step, whatever the id', () => {
		expect(plainName(parameterName('x.forward.kRef', scheme))).toBe('k₂');
		expect(plainName(parameterName('s1.reverse.kRef', scheme))).toBe('k₋₁');
	});
	it('say what a constant belongs to', () => {
		expect(parameterName('x.forward.kRef', scheme).of).toBe('B → 2 C');
		expect(parameterName('r1.initial.A', scheme, { r1: 'run 2' }).of).toBe('charge, run 2');
	});
	it('keep an id that they do not know', () => {
		expect(parameterName('gone.forward.kRef', scheme)).toMatchObject({
			letter: 'gone.forward.kRef',
			kind: 'other'
		});
	});
	it('replace ids in a message of the engine, and nothing else', () => {
		const runNames = { r1: 'Run 1', r12: 'Run 12' };
		expect(inPlainWords('x.forward.kRef has half-life 3 in run r12, not r1.', scheme, runNames)).toBe(
			'k₂ (B → 2 C) has half-life 3 in Run 12, not Run 1.'
		);
		expect(inPlainWords('r1.initial.A is free; r3 stays.', scheme, runNames)).toBe(
			'A₀ (charge, Run 1) is free; r3 stays.'
		);
	});
	it('write a loss in words', () => {
		expect(stepWords({ ...scheme.steps[0], products: [] })).toBe('A → (not assayed)');
	});
});

describe('the headline of a fit', () => {
	it('puts a finding that stops before anything good', () => {
		const r = report({
			parameters: [fitted('s1.forward.kRef')],
			findings: [
				{ code: 'x', level: 'note', message: 'Fine.' },
				{ code: 'y', level: 'stop', message: 'Two answers fit alike.' }
			]
		});
		expect(headline(r, scheme)).toBe('Two answers fit alike.');
	});
	it('names the constants whose interval is open', () => {
		const r = report({ parameters: [fitted('s1.forward.kRef'), fitted('x.forward.kRef', [null, 3])] });
		expect(headline(r, scheme)).toBe('k₂ is not determined by these data.');
	});
	it('does not call a search that did not settle a result', () => {
		expect(
			headline(report({ status: 'not converged', parameters: [fitted('s1.forward.kRef')] }), scheme)
		).toMatch(/do not use/);
	});
	it('counts what is determined', () => {
		const r = report({ parameters: [fitted('s1.forward.kRef'), fitted('x.forward.kRef')] });
		expect(headline(r, scheme)).toBe('Both fitted constants are determined by these data.');
	});
});

describe('names of constants that each run has for itself', () => {
	const parameters = [
		{ id: 'r1.s1.forward.k', local: { run: 'r1', of: 's1.forward.kRef' } },
		{ id: 'r2.s1.forward.k', local: { run: 'r2', of: 's1.forward.kRef' } },
		{ id: 's2.forward.kRef' }
	] as FitReport['parameters'];
	const two = { ...scheme, steps: [scheme.steps[0], { ...scheme.steps[0], id: 's2' }] };

	it('stand once in a sentence and by run in a table', () => {
		const report = { parameters, fittedIds: parameters.map((p) => p.id) };
		expect(fittedNames(report, two)).toEqual(['k₁ of each run', 'k₂']);
		expect(localRun(report, 'r2.s1.forward.k', { r2: 'Run 2' })).toBe('Run 2');
		expect(localRun(report, 's2.forward.kRef')).toBeNull();
	});
});

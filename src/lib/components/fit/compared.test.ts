import { describe, expect, it } from 'vitest';
import { fitRequest, type FitReport } from '$lib/schemas/fit';
import { comparedParameters, type ComparedFit } from './compared';

const fit = (stepIds: string[], units: string[] = stepIds.map(() => '1/h')): ComparedFit => ({
	id: stepIds.join(),
	number: 1,
	scheme: { name: 'x', number: 1 },
	runs: [{ requestId: 'r1', name: 'Run 1', revision: 1 }],
	request: fitRequest.parse({
		species: [{ id: 'A' }, { id: 'B' }, { id: 'C' }],
		steps: stepIds.map((id, i) => ({
			id,
			reactant: 'ABC'[i],
			products: [{ species: 'ABC'[i + 1] }],
			forward: { kRef: { value: 1, unit: '1/h' } }
		})),
		referenceTemperature: { value: 50, unit: 'degC' },
		runs: [
			{
				id: 'r1',
				temperature: { value: 50, unit: 'degC' },
				initial: {},
				timeUnit: 'h',
				channels: [{ id: 'A', weights: { A: 1 }, unit: 'mol/L' }],
				timepoints: []
			}
		]
	}),
	report: {
		parameters: stepIds.map((id, i) => ({
			id: `${id}.forward.kRef`,
			estimate: i + 1,
			standardError: 0.1,
			ci95: null,
			profileCi95: null,
			unit: units[i],
			state: 'fitted'
		}))
	} as FitReport
});

describe('constants side by side', () => {
	it('meet by what they are, whatever the ids of the steps', () => {
		const rows = comparedParameters([fit(['s1', 's2']), fit(['first'])]);
		expect(rows.map((r) => [r.name.of, r.of.map((p) => p?.estimate)])).toEqual([
			['A → B', [1, 1]],
			['B → C', [2, undefined]]
		]);
	});
	it('stay apart where their units differ', () => {
		expect(comparedParameters([fit(['s1']), fit(['s1'], ['1/min'])])).toHaveLength(2);
	});
});

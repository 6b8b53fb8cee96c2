import { describe, expect, it } from 'vitest';
import {
	linearSystem,
	solve,
	sensitivities,
	toNetwork,
	rateConstants,
	checkNetwork,
	conservedTotals
} from './index';

const scheme = (steps: [string, string, number, number?][]) => {
	const ids = [...new Set(steps.flatMap(([a, b]) => [a, b]))];
	return toNetwork({
		species: ids.map((id) => ({ id, name: '' })),
		steps: steps.map(([a, b, k, r], i) => ({
			id: `s${i + 1}`,
			reactant: a,
			products: [{ species: b, coefficient: 1 }],
			forward: { kRef: { value: k, unit: '1/h' } },
			reverse: r ? { kRef: { value: r, unit: '1/h' } } : null
		})),
		referenceTemperature: { value: 25, unit: 'degC' }
	}).network;
};
const systemOf = (network: ReturnType<typeof scheme>) =>
	linearSystem(
		network,
		rateConstants(network, { temperatureK: network.referenceTemperatureK, excessMolPerL: {} })
	);

describe('exact cases', () => {
	it('A → B ⇌ C with 0.4, 0.3, 0.1 1/h, where the matrix is defective', () => {
		const s = solve(
			systemOf(
				scheme([
					['A', 'B', 0.4],
					['B', 'C', 0.3, 0.1]
				])
			),
			[1, 0, 0]
		);
		const c = s.at(2.5 * 3600);
		expect(c[0]).toBeCloseTo(0.36788, 5);
		expect(c[1]).toBeCloseTo(0.43394, 5);
		expect(c[2]).toBeCloseTo(0.19818, 5);
		expect(s.final[1]).toBeCloseTo(0.25, 14);
	});
	it('an irreversible loop', () => {
		const s = solve(
			systemOf(
				scheme([
					['A', 'B', 1],
					['B', 'C', 1],
					['C', 'A', 1]
				])
			),
			[1, 0, 0]
		);
		const c = s.at(3600);
		expect(c[0]).toBeCloseTo(1 / 3 + (2 / 3) * Math.exp(-1.5) * Math.cos(Math.sqrt(0.75)), 14);
		expect(c[1]).toBeCloseTo(0.38328, 5);
	});
	it('kinetic sensitivities', () => {
		const n = scheme([
			['A', 'B', 0.7 * 3600, 0.3 * 3600],
			['B', 'C', 0.2 * 3600]
		]);
		const r = sensitivities(
			systemOf(n),
			[1, 0, 0],
			[2],
			[
				{ kind: 'rate', step: 0, direction: 'forward' },
				{ kind: 'rate', step: 1, direction: 'forward' }
			]
		);
		expect(r.derivatives[0] / 0.7).toBeCloseTo(-0.4612502542544051, 12);
		expect(r.derivatives[5] / 0.2).toBeCloseTo(0.6089532004322483, 12);
		expect(checkNetwork(n, { A: 1 })).toEqual([]);
		expect(conservedTotals(n)[0].name).toBe('A + B + C');
	});
});

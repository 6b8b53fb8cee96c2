import { describe, expect, it } from 'vitest';
import { checkNetwork, toNetwork } from '$lib/kinetics';
import type { SchemeContent } from '$lib/schemas/scheme';
import { closeLoop, closesByOneConstant } from './loop';

const k = (value: number) => ({ kRef: { value, unit: '1/h' } });
const step = (id: string, from: string, to: string, forward: number, reverse: number) => ({
	id,
	reactant: from,
	products: [{ species: to, coefficient: 1 }],
	forward: k(forward),
	reverse: k(reverse)
});
const broken = (content: SchemeContent) => checkNetwork(toNetwork(content).network).find(closesByOneConstant);

/** A ⇌ B ⇌ C ⇌ A with 1.0/0.5, 0.8/0.2, 0.3/kAC; it balances at kAC = 2.4 (1·0.8·0.3 over 0.5·0.2). */
const loop = (kAC: number): SchemeContent => ({
	species: ['A', 'B', 'C'].map((id) => ({ id, name: '' })),
	steps: [step('s1', 'A', 'B', 1, 0.5), step('s2', 'B', 'C', 0.8, 0.2), step('s3', 'C', 'A', 0.3, kAC)],
	referenceTemperature: { value: 25, unit: 'degC' }
});

describe('closing a loop of reversible steps', () => {
	it('finds nothing to close where the loop balances', () => {
		expect(broken(loop(2.4))).toBeUndefined();
	});
	it('sets one reverse constant so that the finding is gone', () => {
		const open = loop(1);
		const issue = broken(open)!;
		expect(issue.ratio).toBeCloseTo(2.4, 10);
		const closed = closeLoop(open, issue);
		expect(broken(closed)).toBeUndefined();
		expect(closed.steps.filter((s, i) => s !== open.steps[i])).toHaveLength(1);
	});
	it('changes the equilibrium constant where the step is given by one', () => {
		const open = loop(1);
		const named = broken(open)!;
		const steps = open.steps.map((s) =>
			s.id === named.stepId
				? {
						...s,
						reverse: {
							equilibriumConstant: {
								value: s.forward.kRef.value / (s.reverse as { kRef: { value: number } }).kRef.value,
								unit: '1'
							}
						}
					}
				: s
		);
		const content = { ...open, steps };
		expect(broken(closeLoop(content, broken(content)!))).toBeUndefined();
	});
});

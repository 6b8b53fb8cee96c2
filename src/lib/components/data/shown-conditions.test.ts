import { describe, expect, it } from 'vitest';
import type { Conditions, Finding, Mapping } from '$lib/schemas/sheet';
import { shownConditions } from './shown-conditions';

const charge = { A: { value: 0.5, unit: 'mol/L' } };
const conditions = (initial: Conditions['initial']): Conditions => ({ temperature: null, initial, excess: {} });
const mapping = (own?: Conditions) => ({ conditions: own }) as unknown as Mapping;
const settled = (findings: Partial<Finding>[]) => ({
	findings: findings as Finding[],
	mapping: mapping(conditions(charge))
});

describe('the conditions in the fields', () => {
	it('are what was typed, also before the reader is through with it', () => {
		const typed = conditions({ A: { value: 0.7, unit: 'mol/L' } });
		expect(shownConditions({ mapping: mapping(typed) }, settled([]))).toBe(typed);
	});
	it('show a charge that was given as an answer', () => {
		const answered = settled([{ rule: 'B33', answer: { key: 'given' } }]);
		expect(shownConditions({ mapping: mapping() }, answered).initial).toEqual(charge);
	});
	it('stay empty where a typed charge was taken out and the reader still knows the old one', () => {
		expect(shownConditions({ mapping: mapping(conditions({})) }, settled([])).initial).toEqual({});
		expect(shownConditions({ mapping: mapping() }, null)).toEqual(conditions({}));
	});
});

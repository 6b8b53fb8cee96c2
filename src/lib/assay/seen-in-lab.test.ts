import { describe, expect, it } from 'vitest';
import type { Finding, Mapping, Settlement, TableProposal } from '$lib/schemas/sheet';
import { sentenceToConfirm } from './seen-in-lab';

const mapping = (unit: string | null) =>
	({ columns: [{ column: 1, role: 'time', unit }] }) as unknown as Mapping;
const table = (unit: string | null) => ({ mapping: mapping(unit) }) as unknown as TableProposal;
const settled = (findings: Partial<Finding>[] = []) =>
	({
		plausibility: ['Half of A is gone after about 52 min – as seen in the lab?'],
		findings
	}) as unknown as Settlement;
const units = ['s', 'min', 'h', 'd'].map((key) => ({ key, label: key }));

describe('the sentence to confirm', () => {
	it('is not asked where the sheet states the time unit', () => {
		expect(sentenceToConfirm(table('h'), mapping('h'), settled())).toBeNull();
	});
	it('is asked where a person answered with a time unit', () => {
		const sentence = sentenceToConfirm(
			table(null),
			mapping(null),
			settled([{ options: units, answer: { key: 'min' } }])
		);
		expect(sentence).toContain('52 min');
	});
	it('is asked where a person set another unit than was read', () => {
		expect(sentenceToConfirm(table('h'), mapping('min'), settled())).toContain('52 min');
	});
	it('is not asked while the unit is open', () => {
		expect(sentenceToConfirm(table(null), mapping(null), settled([{ options: units }]))).toBeNull();
	});
});

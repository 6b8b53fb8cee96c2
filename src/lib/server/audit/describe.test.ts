import { describe as group, expect, it } from 'vitest';
import { describe, differences, shown, WRITERS } from './describe';
import { AUDIT_EVENTS } from './events';

group('an entry in words', () => {
	it('has a sentence of its own for each kind', () => {
		expect(Object.keys(AUDIT_EVENTS).filter((type) => !(type in WRITERS))).toEqual([]);
	});
	it('shows a change field by field', () => {
		const payload = JSON.stringify({ changes: [{ field: 'decision', from: 'hold', to: null }] });
		expect(describe('study.changed', payload)).toEqual({
			line: 'Study changed',
			details: [{ label: 'decision', from: 'hold', to: null }]
		});
	});
	it('is named as not as written when its content was altered, instead of being left out', () => {
		expect(describe('person.renamed', '{"from":1}').line).toBe('Person renamed (content is not as written)');
		expect(describe('person.renamed', '{').line).toBe('Person renamed (content cannot be read)');
		expect(describe('person.vanished', '{}').line).toBe('Person vanished (unknown kind of entry)');
	});
});

group('differences', () => {
	it('are the leaves that changed, appeared or went, by their path', () => {
		const from = { a: { x: 1, y: 'same' }, list: [{ key: 'PS-04' }] };
		const to = { a: { x: 2, y: 'same' }, list: [{ key: 'PS-04' }, { key: 'PS-05' }] };
		expect(differences(from, to)).toEqual([
			{ label: 'a, x', from: '1', to: '2' },
			{ label: 'list 2, key', from: null, to: 'PS-05' }
		]);
	});
	it('show a value in words', () => {
		expect([true, false, 0, '', null, [1]].map(shown)).toEqual(['yes', 'no', '0', null, null, '[1]']);
	});
});

import { describe, expect, it } from 'vitest';
import type { Finding } from '$lib/schemas/sheet';
import { answerOf, countWords, optionWords, placeWords, workingOrder } from './finding-answer';

const finding = (over: Partial<Finding>): Finding => ({
	id: 'x',
	level: 'ask',
	rule: 'B9',
	sheet: '50°C',
	cells: ['F6', 'G6'],
	count: 2,
	found: '',
	expected: '',
	message: '',
	options: [],
	open: true,
	...over
});

const lod = { key: 'lod', label: 'LOD', kind: 'number' as const, unit: 'mmol/L' };

describe('an option', () => {
	it('that needs nothing is answered by one press', () => {
		expect(answerOf({ key: 'missing', label: 'Leave as missing' })).toEqual({ key: 'missing' });
	});
	it('whose value stands on the sheet says the value, and takes it by one press', () => {
		const option = {
			key: 'not-detected',
			label: 'Not detected, below the LOD of …',
			needsValue: [{ ...lod, suggested: 0.6, source: 'A23' }]
		};
		expect(optionWords(option)).toBe('Not detected, below the LOD of 0.6 mmol/L');
		expect(answerOf(option)).toEqual({ key: 'not-detected', values: { lod: 0.6 } });
	});
	it('whose value nobody knows is not answered by a press alone', () => {
		const option = { key: 'limit', label: 'LOQ is …', needsValue: [lod] };
		expect(optionWords(option)).toBe('LOQ is …');
		expect(answerOf(option)).toBeNull();
	});
	it('with several values is answered at once only where all are known', () => {
		const needsValue = [{ ...lod, suggested: 0.6 }, { ...lod, key: 'loq' }];
		expect(answerOf({ key: 'between', label: 'Trace', needsValue })).toBeNull();
	});
});

describe('findings', () => {
	it('keep their places while they are answered', () => {
		const list = [
			finding({ id: 'n', level: 'note', open: false }),
			finding({ id: 'a', level: 'ask', open: false }),
			finding({ id: 'b', level: 'ask' }),
			finding({ id: 's', level: 'stop' })
		];
		expect(workingOrder(list).map((f) => f.id)).toEqual(['s', 'a', 'b', 'n']);
		expect(countWords(list)).toBe('1 stop · 1 ask · 1 note');
	});
	it('name a few cells and say how many more there are', () => {
		expect(placeWords(finding({}))).toBe('F6, G6');
		expect(placeWords(finding({ cells: ['A1', 'A2', 'A3'], count: 40 }), 2)).toBe('A1, A2 and 38 more');
	});
});

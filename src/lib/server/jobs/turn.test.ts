import { describe, expect, it } from 'vitest';
import { inTurn, type Served } from './turn';

const jobs = (...names: string[]) => names.map((id) => ({ id, by: id[0] }));
const served = (of: Record<string, Served>) => new Map(Object.entries(of));

describe('whose turn it is', () => {
	it('people take turns: the first job of one comes before the second of another', () => {
		expect(inTurn(jobs('a1', 'a2', 'a3', 'b1', 'b2', 'c1'), new Map())).toEqual([
			'a1',
			'b1',
			'c1',
			'a2',
			'b2',
			'a3'
		]);
	});

	it('who was served longest ago comes first, whatever the age of the jobs', () => {
		const before = served({ a: { running: 0, last: 20 }, b: { running: 0, last: 10 } });
		expect(inTurn(jobs('a1', 'a2', 'b1'), before)).toEqual(['b1', 'a1', 'a2']);
	});

	it('who has something running waits for those who have not', () => {
		const before = served({ a: { running: 1, last: 5 }, b: { running: 0, last: 10 } });
		expect(inTurn(jobs('a1', 'b1'), before)).toEqual(['b1', 'a1']);
	});

	it('one person alone is served by age', () => {
		expect(inTurn(jobs('a1', 'a2', 'a3'), new Map())).toEqual(['a1', 'a2', 'a3']);
		expect(inTurn([], new Map())).toEqual([]);
	});
});

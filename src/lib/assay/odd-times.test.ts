/** Times as laboratories write them (all invented): backwards, before zero, in words, below the wrong header. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	conditions,
	first,
	openIn as open,
	rolesOf as roles,
	species,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import type { TestCell } from '../server/sheets/reading/test-workbook';
import { settle } from './index';

const T = [0, 1, 2, 4, 8];
const A = [0.5, 0.4, 0.3, 0.2, 0.1];

describe('times', () => {
	it('that fall from the first row to the last are one question', () => {
		const rows = T.map((t, i): TestCell[] => [t, A[i]]).reverse();
		const workbook = book([['Time (h)', 'A (mol/L)'], ...rows]);
		expect(open(workbook)).toEqual(['B18 A2']);
		const settled = answer(workbook, { B18: { key: 'reverse' } });
		expect([timesOf(settled), valuesOf(settled)]).toEqual([T, A]);
		expect(settled.conversions).toContain('Times that fall from 8 to 0 read from the last row.');
	});

	it('with one slip are one question, whatever follows', () => {
		const rows = [0, 1, 20, 3, 4, 5].map((t, i): TestCell[] => [t, 0.5 - i / 20]);
		expect(open(book([['Time (h)', 'A (mol/L)'], ...rows]))).toEqual(['B18 A5']);
	});

	it('written T0, 30min, 1h, overnight', () => {
		const workbook = book([
			['Time', 'A (mol/L)'],
			['T0', 0.5],
			['30min', 0.4],
			['1h', 0.3],
			['2h', 0.2],
			['overnight', 0.02]
		]);
		expect(open(workbook)).toEqual(['B18 A6', 'B17 A3']);
		expect(
			timesOf(answer(workbook, { B17: { key: 'convert' }, B18: { key: 'enter', values: { value: '16 h' } } }))
		).toEqual([0, 0.5, 1, 2, 16]);
	});

	it('stored as h:mm below a header in min are asked: 1:30 typed for 90 s is stored as 90 min', () => {
		const cells = [0, 0.5, 1, 2].map((h): TestCell => ({ v: h / 24, format: 'h:mm' }));
		const workbook = book([['Time (min)', 'A (mol/L)'], ...cells.map((t, i): TestCell[] => [t, A[i]])]);
		const [f] = first(workbook).findings;
		expect([f.level, f.rule, f.message]).toEqual([
			'ask',
			'B17',
			'A3 is stored as 0:30 (30 min), and its header says min. Hours and minutes as stored, or minutes and seconds (0.5 min)?'
		]);
		const read = (key: string) => answer(workbook, { B17: { key } }).run?.timepoints.map((p) => p.time);
		expect(read('h:mm')).toEqual([0, 0.5, 1, 2]);
		expect(read('mm:ss')?.map((t) => Number((t * 60).toFixed(9)))).toEqual([0, 0.5, 1, 2]);
		const hours = book([['Time (h)', 'A (mol/L)'], ...cells.map((t, i): TestCell[] => [t, A[i]])]);
		expect(open(hours)).toEqual([]);
	});

	it('before time zero are asked, and left out or kept', () => {
		const rows = [-0.5, 0, 1, 2, 4].map((t, i): TestCell[] => [t, 0.5 - i / 20]);
		const workbook = book([['Time (h)', 'A (mol/L)'], ...rows]);
		expect(open(workbook)).toEqual(['B18 A2']);
		expect(timesOf(answer(workbook, { B18: { key: 'leave-out' } }))).toEqual([0, 1, 2, 4]);
		expect(timesOf(answer(workbook, { B18: { key: 'keep' } }))).toEqual([-0.5, 0, 1, 2, 4]);
	});

	it('of day beside the number of the day count over days, also over two nights', () => {
		const clock = (h: number): TestCell => ({ v: h / 24, format: 'hh:mm' });
		const workbook = book([
			['Day', 'Time', 'A (mol/L)'],
			[1, clock(9), 0.5],
			[1, clock(17), 0.4],
			[2, clock(9), 0.3],
			[4, clock(9), 0.2]
		]);
		expect(roles(workbook).map(([role]) => role)).toEqual(['ignore', 'time', 'species']);
		expect(timesOf(answer(workbook, { B16: { key: 'together' } }))).toBeUndefined();
		const dated = first(workbook).findings.find((f) => f.rule === 'B16');
		expect(dated?.message).toContain('Column A holds dates (day 1 to day 4)');
		const [yes] = dated?.options ?? [];
		const mapping = { ...first(workbook).mapping, conditions };
		const answers = { [dated?.id ?? '']: { key: yes.key }, 'B16:Data!start': { key: 'first' } };
		expect(timesOf(settle({ workbook, species, mapping, answers }))).toEqual([0, 8, 24, 72]);
	});

	it('in min behind a column of time points and sample names belong to one table', () => {
		const workbook = book([
			['Time point', 'Sample', 'Time (min)', 'A (mol/L)'],
			...T.map((t, i): TestCell[] => [i + 1, `S${i}`, t, A[i]])
		]);
		expect([first(workbook).range, open(workbook)]).toEqual(['A2:D6', []]);
		expect(answer(workbook, {}).run?.timepoints.map((p) => [p.time, p.sampleId])[1]).toEqual([1, 'S1']);
	});
});

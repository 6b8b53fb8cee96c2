/** Times (B14 to B18, B37): durations, times of day, dates, mixed units, times that go back. */
import { describe, expect, it } from 'vitest';
import type { Answer } from '../schemas/sheet';
import {
	species,
	conditions,
	ROWS,
	book,
	first,
	findingsOf,
	times,
	answer,
	timesOf,
	summary
} from '../server/sheets/reading/test-tables';
import { type TestCell } from '../server/sheets/reading/test-workbook';
import { propose, settle } from './index';

describe('times', () => {
	it('B14: durations are the stored number of days, whatever the display', () => {
		const day = (h: number, format: string): TestCell => ({ v: h / 24, format });
		const workbook = times([
			day(0, '[h]:mm'),
			day(0.25, '[h]:mm'),
			day(1, '[h]:mm'),
			day(2, '[h]:mm'),
			day(25, 'h:mm'),
			day(26, '[h]:mm')
		]);
		expect(findingsOf(workbook, 'B14')[0].message).toBe(
			'A6 is shown as 1:00, stored as 25:00; 25 h is used.'
		);
		expect(timesOf(answer(workbook, {}))).toEqual([0, 0.25, 1, 2, 25, 26]);
	});

	it('B15: times of day need a start and ask at midnight', () => {
		const clock = (h: number, m: number): TestCell => ({ v: (h * 60 + m) / 1440, format: 'hh:mm' });
		const workbook = times(
			[clock(22, 0), clock(23, 0), clock(23, 50), clock(0, 20), clock(2, 0), clock(3, 0)],
			'Uhrzeit'
		);
		const asked = first(workbook).findings.filter((f) => f.rule === 'B15');
		expect(asked.map((f) => f.message)).toEqual([
			'The column holds times of day. When was time zero?',
			'0:20 follows 23:50: next day?'
		]);
		const { tables } = propose(workbook, species);
		const answers = {
			[asked[0].id]: { key: 'start', values: { value: '21:30' } },
			[asked[1].id]: { key: 'next-day' }
		};
		const settled = settle({
			workbook,
			species,
			mapping: {
				...tables[0].mapping,
				conditions: {
					...conditions,
					initial: conditions?.initial ?? {},
					excess: {},
					temperature: { value: 1, unit: 'degC' }
				}
			},
			answers
		});
		expect(timesOf(settled)).toEqual([
			0.5,
			1.5,
			Number((140 / 60).toPrecision(15)),
			Number((170 / 60).toPrecision(15)),
			4.5,
			5.5
		]);
	});

	it('B15: times that begin in the morning are asked: time of day or elapsed', () => {
		const workbook = times(['09:40', '10:10', '10:40', '11:40', '12:40', '13:40']);
		expect(findingsOf(workbook, 'B17').length + findingsOf(workbook, 'B15').length).toBeGreaterThan(0);
		expect(findingsOf(workbook, 'B15')[0].message).toBe(
			'The first time is 09:40. Time of day, or elapsed time?'
		);
	});

	it('B16: date-time stamps are counted as differences, across a clock change by the zone', () => {
		const workbook = times(
			['2026-10-25 00:30', '2026-10-25 01:30', '2026-10-25 04:30', '2026-10-25 05:30', '2026-10-25 06:30'],
			'Date and time'
		);
		const asked = first(workbook).findings.filter((f) => f.rule === 'B16');
		expect(asked.map((f) => f.id)).toEqual(['B16:Data!zone']);
		const mapping = { ...first(workbook).mapping, conditions };
		const settleWith = (zone: Answer) =>
			timesOf(
				settle({
					workbook,
					species,
					mapping,
					answers: { 'B16:Data!zone': zone, 'B16:Data!start': { key: 'first' } }
				})
			);
		// The clocks of central Europe go back from 3:00 to 2:00 on 25 Oct 2026: one hour more has passed.
		expect(settleWith({ key: 'zone', values: { value: 'Europe/Berlin' } })).toEqual([0, 1, 5, 6, 7]);
		expect(settleWith({ key: 'unchanged' })).toEqual([0, 1, 4, 5, 6]);
	});

	it('B16: a stamp in the hour that the clocks showed twice is asked', () => {
		const workbook = times(
			['2026-10-25 01:30', '2026-10-25 02:30', '2026-10-25 03:30', '2026-10-25 04:30', '2026-10-25 05:30'],
			'Timestamp'
		);
		const mapping = { ...first(workbook).mapping, conditions, timeZone: 'Europe/Berlin' };
		const start: Answer = { key: 'first' };
		const open = settle({ workbook, species, mapping, answers: { 'B16:Data!start': start } }).findings.filter(
			(f) => f.open
		);
		expect(open.map((f) => [f.id, f.message])).toEqual([
			[
				'B16:Data!doubled-A3',
				'A3 2026-10-25 02:30: the clocks showed this hour twice. Before or after they were put back?'
			]
		]);
		const settleWith = (key: string) =>
			timesOf(
				settle({
					workbook,
					species,
					mapping,
					answers: { 'B16:Data!start': start, 'B16:Data!doubled-A3': { key } }
				})
			);
		expect(settleWith('before')).toEqual([0, 1, 3, 4, 5]);
		expect(settleWith('after')).toEqual([0, 2, 3, 4, 5]);
	});

	it('B16: a date that reads as day-month or month-day is asked where it matters', () => {
		const workbook = times(
			['03/04/2026 09:00', '03/04/2026 10:00', '03/05/2026 09:00', '03/05/2026 10:00', '03/05/2026 11:00'],
			'Timestamp'
		);
		const mapping = { ...first(workbook).mapping, conditions };
		const settleWith = (key: string) =>
			timesOf(
				settle({
					workbook,
					species,
					mapping,
					answers: {
						'B16:Data!order': { key },
						'B16:Data!zone': { key: 'unchanged' },
						'B16:Data!start': { key: 'first' }
					}
				})
			);
		expect(settleWith('month')).toEqual([0, 1, 24, 25, 26]);
		expect(settleWith('day')).toEqual([0, 1, 720, 721, 722]);
	});

	it('B17: "90 min" in an h column is asked; mixed units and kinds stop', () => {
		const one = times([0, 0.5, 1, '90 min', 2, 3], 'Time (h)');
		expect(summary(findingsOf(one, 'B17')[0])).toEqual(['ask', 'A5']);
		expect(timesOf(answer(one, { B17: { key: 'convert' } }))).toEqual([0, 0.5, 1, 1.5, 2, 3]);
		const mixed = times(['0 min', '30 min', '1 h', '2 h', '1 d']);
		expect(findingsOf(mixed, 'B17')[0].level).toBe('stop');
		expect(timesOf(answer(mixed, { B17: { key: 'convert' } }))).toEqual([0, 0.5, 1, 2, 24]);
		const kinds = times([{ v: 0.5 / 24, format: '[h]:mm' }, 1, 2, 3, 4], 'Time (h)');
		expect(summary(findingsOf(kinds, 'B17')[0])).toEqual(['stop', 'A2']);
	});

	it('B18: a time that goes back stops; it can be entered, left out, kept, or begin a new run', () => {
		const workbook = times([0, 1, 2, 0.3, 4, 5], 'Time (h)');
		const [f] = findingsOf(workbook, 'B18');
		expect([...summary(f)!, f.options.map((o) => o.key)]).toEqual([
			'stop',
			'A5',
			['enter', 'new-run', 'leave-out', 'keep']
		]);
		expect(timesOf(answer(workbook, { B18: { key: 'enter', values: { value: '3' } } }))).toEqual([
			0, 1, 2, 3, 4, 5
		]);
		expect(timesOf(answer(workbook, { B18: { key: 'leave-out' } }))).toEqual([0, 1, 2, 4, 5]);
		expect(timesOf(answer(workbook, { B18: { key: 'new-run' } }))).toEqual([0, 1, 2]);
		expect(answer(workbook, { B18: { key: 'enter', values: { value: 'soon' } } }).findings[0].problem).toBe(
			'"soon" is not a time. Write for example 1.5, 1:30 or 90 min.'
		);
		const blank = times([0, 1, null, 3, 4, 5], 'Time (h)');
		expect(findingsOf(blank, 'B31')[0].message).toContain('Row 4 has values but no time in A4.');
	});

	it('B37: the 1904 date system is honoured and noted', () => {
		const workbook = book(
			[
				['Time', 'A (mol/L)'],
				...[0, 1, 2, 26, 27].map((h, i) => [{ v: h / 24, format: '[h]:mm' }, 0.5 - i * 0.1])
			],
			{},
			{ date1904: true }
		);
		expect(first(workbook).findings.map((f) => [f.level, f.rule])).toEqual([['note', 'B37']]);
		expect(timesOf(answer(workbook, {}))).toEqual([0, 1, 2, 26, 27]);
	});

	it('reads header words of several languages', () => {
		for (const head of [
			'Zeit (min)',
			'temps / min',
			'Tiempo [min]',
			'tempo, min',
			'Elapsed time (min)',
			't in min',
			'min',
			'Reaktionszeit [min]',
			'Durée (min)'
		])
			expect([head, first(times([0, 1, 2, 3, 4], head))?.mapping.columns[0]]).toEqual([
				head,
				expect.objectContaining({ role: 'time', unit: 'min' })
			]);
		const retention = book([['RT (min)', 'Time (h)', 'A (mol/L)'], ...ROWS.map(([t, a]) => [7.5, t, a])]);
		expect(first(retention).mapping.columns.map((c) => c.role)).toEqual(['ignore', 'time', 'species']);
	});

	it('B17: rows with another kind of time can be left out; plain numbers beside worded times get their unit', () => {
		const kinds = times([{ v: 0.5 / 24, format: '[h]:mm' }, 1, 2, 3, 4], 'Time (h)');
		expect(timesOf(answer(kinds, { B17: { key: 'leave-out' } }))).toEqual([1, 2, 3, 4]);
		const bare = times([0, '30 min', 1, 2, 4]);
		expect(findingsOf(bare, 'B17')[0].message).toBe(
			'Column A holds plain numbers and times such as "30 min". What are the plain numbers in? We will not assume.'
		);
		const settled = answer(bare, { B17: { key: 'h' } });
		expect([timesOf(settled), settled.run?.timeUnit]).toEqual([[0, 0.5, 1, 2, 4], 'h']);
	});
});

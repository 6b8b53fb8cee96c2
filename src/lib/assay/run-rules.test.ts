/** Replicates and the run as a whole (B13, B19, B33 to B36, A7). */
import { describe, expect, it } from 'vitest';
import {
	species,
	conditions,
	HEAD,
	ROWS,
	book,
	first,
	findingsOf,
	answer,
	valuesOf,
	summary
} from '../server/sheets/reading/test-tables';
import { type TestCell } from '../server/sheets/reading/test-workbook';
import { propose, settle } from './index';

describe('replicates and the run as a whole', () => {
	const twice = (extra: TestCell[] = [], head: TestCell[] = []) => [
		[...HEAD, ...head],
		...ROWS.slice(0, 2).map((r) => [...r, ...extra]),
		[1, 0.42, 0.08, ...extra],
		...ROWS.slice(2).map((r) => [...r, ...extra])
	];

	it('B19: equal times without a name are asked; injections are averaged and their spread kept', () => {
		const workbook = book(twice());
		expect(findingsOf(workbook, 'B19')[0].message).toBe(
			'Two rows at 1: injections of one sample, or two samples?'
		);
		expect(valuesOf(answer(workbook, { B19: { key: 'samples' } }))).toHaveLength(7);
		const averaged = answer(workbook, { B19: { key: 'injections' } });
		expect(valuesOf(averaged)?.slice(0, 3)).toEqual([0.5, expect.closeTo(0.41, 12), 0.3]);
		expect(averaged.conversions.join()).toContain('spread A ±0.0141421');
		expect(averaged.run?.replicates).toBe('injections');
	});

	it('B13: with one sample name for both it is the same question; different names answer it', () => {
		const named = (ids: string[]) => book(twice().map((row, i) => [...row, i === 0 ? 'Sample' : ids[i - 1]]));
		expect(findingsOf(named(['1', '2', '2', '3', '4', '5', '6']), 'B13')).toHaveLength(1);
		const apart = named(['1', '2', '3', '4', '5', '6', '7']);
		expect(first(apart).findings).toEqual([]);
		expect(answer(apart, {}).run?.replicates).toBe('samples');
	});

	it('B33: without a row at time zero the charge is asked', () => {
		const workbook = book([HEAD, ...ROWS.slice(1)]);
		const [f] = findingsOf(workbook, 'B33');
		expect([f.level, f.options.map((o) => o.key)]).toEqual(['ask', ['charge', 'fit']]);
		const none = { conditions: { temperature: { value: 50, unit: 'degC' }, initial: {}, excess: {} } };
		expect(answer(workbook, { B33: { key: 'fit', values: { species: 'A' } } }, none).run?.initial).toEqual({
			A: { fit: true }
		});
	});

	it('B34: fewer values than constants stop, fewer than five times are noted', () => {
		const workbook = book([['Time (h)', 'A (mol/L)'], ...ROWS.slice(0, 3).map((r) => r.slice(0, 2))]);
		expect(findingsOf(workbook, 'B34').map((f) => f.level)).toEqual(['note']);
		const settled = settle({
			workbook,
			species,
			mapping: { ...first(workbook).mapping, conditions },
			parameters: 4
		});
		expect(settled.findings[0]).toMatchObject({ rule: 'B34', level: 'stop', open: true });
	});

	it('B35: columns that look copied are noted', () => {
		const same = book([HEAD, ...ROWS.map(([t, a]) => [t, a, a])]);
		expect(findingsOf(same, 'B35')[0].message).toContain('hold the same values throughout');
		const flat = book([HEAD, ...ROWS.map(([t, a]) => [t, a, 0.1])]);
		expect(findingsOf(flat, 'B35')[0].message).toContain('are 0.1');
	});

	it('B36: rows outside 95 to 105 % and a trend are noted, with slope and interval', () => {
		const ab = species.slice(0, 2);
		const workbook = book([HEAD, ...ROWS.map(([t, a, b]) => [t, a, Number(b) * 0.8])]);
		const { findings, massBalance } = settle({
			workbook,
			species: ab,
			mapping: { ...first(workbook, ab).mapping, conditions }
		});
		expect(findings.map((f) => f.id)).toEqual(['B36:Data!rows', 'B36:Data!trend']);
		// 20 % of what has formed is not seen: −4 % at 1 h to −18 % at 5 h.
		expect(massBalance?.rows.map((r) => r.percent)).toEqual([100, 96, 92, 88, 84, 82]);
		expect(massBalance?.slope?.value).toBeCloseTo(-3.714286, 5);
		expect(massBalance?.slope?.high).toBeLessThan(0);
		expect(findings[1].message).toContain('A species that is not seen');
	});

	it('A7: a temperature far from the rest of the log is pointed out, and the log goes into the run', () => {
		const workbook = book([
			[...HEAD, 'T (°C)'],
			...ROWS.map((r, i) => [...r, i === 3 ? 57.3 : 50 + i * 0.1])
		]);
		expect(summary(findingsOf(workbook, 'A7')[0])).toEqual(['note', 'D5']);
		expect(answer(workbook, {}).run?.temperatureLog?.[3]).toEqual({ time: 3, celsius: 57.3 });
	});

	it('the long layout, one row a peak, becomes samples; unknown peaks are asked', () => {
		const rows: TestCell[][] = [['Sample', 'Time (h)', 'Peak', 'RT (min)', 'Area %']];
		[100, 80, 60, 40, 20].forEach((a, i) => {
			rows.push(
				[`S${i}`, i, 'A', 3.1, a - 1],
				[`S${i}`, i, 'B', 4.2, 100 - a],
				[`S${i}`, i, 'RRT 0.87', 3.6, 1]
			);
		});
		const workbook = book(rows);
		const table = first(workbook);
		expect([table.mapping.layout, table.peaks?.map((p) => [p.peak, p.values, p.species])]).toEqual([
			'long',
			[
				['A', 5, 'A'],
				['B', 5, 'B'],
				['RRT 0.87', 5, null]
			]
		]);
		const settled = answer(workbook, {
			B32: { key: 'species', values: { value: 'C' } },
			B22: { key: 'uncorrected' }
		});
		expect(settled.run?.timepoints.map((p) => p.values)).toEqual(
			[100, 80, 60, 40, 20].map((a) => ({ A: a - 1, B: 100 - a, C: 1 }))
		);
		expect(settled.run?.timepoints[1].source).toEqual({
			sheet: 'Data',
			row: 5,
			cells: { A: 'E5', B: 'E6', C: 'E7' }
		});
	});

	it('B35: a value that is repeated more than fifteen times in a row is noted', () => {
		const rows = Array.from({ length: 24 }, (_, i): TestCell[] => [i, i < 18 ? 0.123 : 0.1 - i / 1000]);
		const [f] = findingsOf(book([['Time (h)', 'A (mol/L)'], ...rows]), 'B35');
		expect([f.level, f.message]).toEqual([
			'note',
			'A (column B) repeats 0.123 18 times in a row. Copied cells?'
		]);
		const fewer = rows.map((row, i): TestCell[] => [row[0], i < 15 ? 0.123 : 0.1 - i / 1000]);
		expect(findingsOf(book([['Time (h)', 'A (mol/L)'], ...fewer]), 'B35')).toEqual([]);
	});

	it('B36: the limits are those that are given', () => {
		const ab = species.slice(0, 2);
		const workbook = book([HEAD, ...ROWS.map(([t, a, b]) => [t, a, Number(b) * 0.8])]);
		const mapping = { ...first(workbook, ab).mapping, conditions };
		const rowsNoted = (checks: { massBalanceLow: number; massBalanceHigh: number }) =>
			settle({ workbook, species: ab, mapping, checks }).findings.find((f) => f.id === 'B36:Data!rows')
				?.count ?? 0;
		expect(rowsNoted({ massBalanceLow: 95, massBalanceHigh: 105 })).toBe(4);
		expect(rowsNoted({ massBalanceLow: 85, massBalanceHigh: 115 })).toBe(2);
		expect(rowsNoted({ massBalanceLow: 80, massBalanceHigh: 120 })).toBe(0);
		const noted = propose(workbook, ab, { checks: { massBalanceLow: 80, massBalanceHigh: 120 } }).tables[0];
		expect(noted.findings.map((f) => f.id)).toEqual(['B36:Data!trend']);
	});
});

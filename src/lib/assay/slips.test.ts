/** Slips that no single cell shows: a unit off by a thousand, a charge off by ten, merged values, days read as hours. */
import { describe, expect, it } from 'vitest';
import {
	answer,
	book,
	conditions,
	csv,
	findingsOf,
	first,
	species,
	times,
	timesOf,
	valuesOf
} from '../server/sheets/reading/test-tables';
import { settle } from './index';

const T = [0, 1, 2, 4, 8];
const A = [0.5, 0.4, 0.3, 0.2, 0.1];
const table = (values: number[], head = 'A (mol/L)') =>
	book([['Time (h)', head], ...T.map((t, i) => [t, values[i]])]);
const asked = (workbook: ReturnType<typeof book>) =>
	settle({ workbook, species, mapping: { ...first(workbook).mapping, conditions } }).findings.flatMap((f) =>
		f.open ? [`${f.rule} ${f.cells.join(' ')}`] : []
	);

describe('B4: values beyond what a liquid can hold', () => {
	it('are asked about, and read in the smaller unit on that word', () => {
		const workbook = table(A.map((a) => a * 1000));
		expect(findingsOf(workbook, 'B4')[0].message).toContain('pure water is 55.5 mol/L');
		expect(valuesOf(answer(workbook, { B4: { key: 'mmol/L' } }))).toEqual(A);
	});

	it('are asked about in the one cell that holds such a value, without another unit for the column', () => {
		const workbook = table([0.5, 0.4, 300, 0.2, 0.1]);
		const [f] = findingsOf(workbook, 'B4');
		expect([f.cells, f.options.map((o) => o.key)]).toEqual([['B4'], ['enter', 'missing', 'keep']]);
	});

	it.each([
		['A (mmol/L)', [500, 400, 300, 200, 100]],
		['A (g/L)', [1200, 1000, 800, 700, 600]],
		['A area %', [100.4, 90, 80, 70, 60]]
	])('are none below "%s" with %j', (head, values) => {
		expect(findingsOf(table(values, head), 'B4').filter((f) => /more than can be/.test(f.message))).toEqual(
			[]
		);
	});

	it('are shares of peaks above 100 %', () => {
		expect(findingsOf(table([1000, 900, 800, 700, 600], 'A area %'), 'B4')[0].cells).toHaveLength(5);
	});
});

describe('B33: the charge against the sample at time zero', () => {
	it('is asked about where one is ten times the other', () => {
		const workbook = table(A.map((a) => a / 10));
		expect(asked(workbook)).toEqual(['B33 B2']);
		const kept = answer(workbook, { B33: { key: 'keep' } });
		expect(kept.conversions.join()).toContain('B2: kept at 0.05 mol/L beside a charge of 0.5 mol/L');
	});

	it('is no question where some of it has reacted by the first sample', () => {
		expect(asked(table([0.3, 0.25, 0.2, 0.1, 0.05]))).toEqual([]);
	});
});

describe('B31: a value merged over two rows', () => {
	const workbook = book(
		[
			['Time (h)', 'A (mol/L)'],
			[0, 0.5],
			[1, 0.4],
			[2, null],
			[4, 0.2],
			[8, 0.1]
		],
		{ merges: ['B3:B4'] }
	);

	it('is not lost without a question', () => {
		expect(asked(workbook)).toEqual(['B31 B4']);
		expect(valuesOf(answer(workbook, { B31: { key: 'same' } }))).toEqual([0.5, 0.4, 0.4, 0.2, 0.1]);
		expect(valuesOf(answer(workbook, { B31: { key: 'missing' } }))).toEqual([0.5, 0.4, null, 0.2, 0.1]);
	});
});

describe('B17: two columns of times', () => {
	const workbook = book([
		['Time (h)', 'Time (min)', 'A (mol/L)'],
		...T.map((t, i) => [t, i === 3 ? 300 : t * 60, A[i]])
	]);

	it('that differ in one row are asked about there', () => {
		expect(asked(workbook)).toEqual(['B17 A5 B5']);
		expect(timesOf(answer(workbook, { B17: { key: 'first' } }))).toEqual(T);
		const second = answer(workbook, { B17: { key: 'second' } });
		expect(timesOf(second)).toEqual([0, 1, 2, 5, 8]);
		expect(second.run?.corrections).toMatchObject([{ cell: 'A5', original: '4', corrected: '5 h' }]);
	});

	it('that agree within rounding, or hold different things, raise no question', () => {
		const rounded = [0, 20, 40, 60, 90].map((min, i) => [Number((min / 60).toFixed(2)), min, A[i]]);
		expect(asked(book([['Time (h)', 'Time (min)', 'A (mol/L)'], ...rounded]))).toEqual([]);
		const other = T.map((t, i) => [t, 2.3 + i / 100, A[i]]);
		expect(asked(book([['Time (h)', 'RT (min)', 'A (mol/L)'], ...other]))).toEqual([]);
	});
});

describe('B17: parts of a day below a header in h', () => {
	const days = (minutes: number[]) =>
		times(
			minutes.map((m) => m / 1440),
			'Time (h)'
		);

	it('are asked about, and read as days on that word', () => {
		for (const minutes of [
			[0, 30, 60, 120, 240],
			[0, 31, 62, 123, 245]
		]) {
			expect(asked(days(minutes)).map((q) => q.slice(0, 6))).toEqual(['B17 A3']);
			expect(timesOf(answer(days(minutes), { B17: { key: 'days' } }))).toEqual(
				minutes.map((m) => Number((m / 60).toPrecision(15)))
			);
		}
	});

	it('stay as written when they are hours', () => {
		expect(timesOf(answer(days([0, 30, 60, 120, 240]), { B17: { key: 'unit' } }))?.[2]).toBeCloseTo(
			1 / 24,
			12
		);
	});

	it('are found in a text file with nine decimals', () => {
		const rows = [0, 30, 60, 120].map((m, i) => `${(m / 1440).toFixed(9)},${A[i]}`);
		expect(asked(csv(['Time (h),A (mol/L)', ...rows].join('\n'))).map((q) => q.slice(0, 3))).toEqual(['B17']);
	});

	it.each([
		['minutes divided by 60', [0, 300, 600, 900, 1800]],
		['steps of 15 s', [0, 15, 30, 45, 60]],
		['steps of 10 s', [0, 10, 20, 30, 40]],
		['quarters of an hour', [0, 900, 1800, 3600, 7200]]
	])('are not supposed in %s', (_, seconds) => {
		expect(
			asked(
				times(
					seconds.map((s) => s / 3600),
					'Time (h)'
				)
			)
		).toEqual([]);
	});
});

describe('a temperature log', () => {
	it('whose cells carry their unit as text is read, and kelvin among them turned to °C', () => {
		const readings = ['50 °C', '50.5 °C', '323.15 K', '50 °C', '49.5 °C'];
		const workbook = book([['Time (h)', 'T (°C)', 'A (mol/L)'], ...T.map((t, i) => [t, readings[i], A[i]])]);
		expect(answer(workbook, {}).run?.temperatureLog?.map((r) => r.celsius)).toEqual([50, 50.5, 50, 50, 49.5]);
	});
});

describe('a first sample whose value is a slip', () => {
	it('B11: is a sample and asked about, not a second header row', () => {
		const workbook = csv('Time (h),A (mol/L)\n0,O.5\n1,0.4\n2,0.3\n4,0.2\n8,0.1\n');
		expect(first(workbook).range).toBe('A2:B6');
		expect(asked(workbook)).toEqual(['B11 B2']);
	});
});

describe('B6: a row of a comma file with one cell more than the others', () => {
	it('may hold a decimal comma, which shifts what follows', () => {
		const workbook = csv(
			'Time (h),A (mol/L),B (mol/L)\n0,0.5,0\n1,0.4,0.1\n2,0,3,0.2\n4,0.2,0.3\n8,0.1,0.4\n'
		);
		expect(asked(workbook)).toEqual(['B6 D4']);
		expect(answer(workbook, { B6: { key: 'keep' } }).open).toBe(0);
	});
});

describe('B4: shares on the wrong scale', () => {
	it('headed % and counted in fractions are asked about once, and take that unit', () => {
		const rows = T.map((t, i) => [t, A[i] * 2, 1 - A[i] * 2]);
		const workbook = book([['Time (h)', 'A (% of charge)', 'B (% of charge)'], ...rows]);
		expect(findingsOf(workbook, 'B4').map((f) => f.cells)).toEqual([['B2']]);
		const settled = answer(workbook, { B4: { key: 'fraction' } });
		expect(settled.run?.channels.map((c) => c.unit)).toEqual(['fraction of charge', 'fraction of charge']);
		expect(valuesOf(settled)).toEqual([1, 0.8, 0.6, 0.4, 0.2]);
	});

	it('headed as fractions and counted in percent are asked about', () => {
		const workbook = table([100, 80, 60, 40, 20], 'A (fraction of charge)');
		expect(answer(workbook, { B4: { key: '% of charge' } }).run?.channels[0].unit).toBe('% of charge');
	});

	it('are no question for percent from 100 down', () => {
		expect(findingsOf(table([100, 80, 60, 40, 0.9], 'A (% of charge)'), 'B4')).toEqual([]);
	});
});

describe('B31: a long list whose second sample has no time', () => {
	it('is not given the time of the sample before it', () => {
		const rows = T.flatMap((t, i) => [
			[`S${i}`, i === 2 ? null : t, 'A', A[i]],
			[`S${i}`, i === 2 ? null : t, 'B', 0.5 - A[i]]
		]);
		expect(asked(book([['Sample', 'Time (h)', 'Peak', 'Conc (mol/L)'], ...rows]))).toEqual(['B31 B6']);
	});
});

describe('B1: a first sample whose time is a word', () => {
	it('is counted as header only on that word', () => {
		const rows = T.map((t, i) => [i === 0 ? 'start' : t, A[i], 0.5 - A[i]]);
		const [q] = asked(book([['Time (h)', 'A (mol/L)', 'B (mol/L)'], ...rows]));
		expect(q).toMatch(/^B1[18]? /);
	});

	it('is no question for columns that are counted', () => {
		const rows = T.map((t, i) => [t, A[i], 0.5 - A[i]]);
		const workbook = book([['Time (h)', 'A (mol/L)', 'A (mol/L)'], ['Injection', 1, 2], ...rows]);
		expect(asked(workbook).filter((q) => q.startsWith('B1 '))).toEqual([]);
	});
});

describe('B1: rows that blank rows part from the table', () => {
	const parted = (times: number[]) =>
		book([
			['Time (h)', 'A (mol/L)'],
			[0, 0.5],
			[1, 0.4],
			[2, 0.3],
			[null],
			[null],
			[null],
			...times.map((t, i) => [t, 0.2 - i * 0.02])
		]);

	it('and whose times go on are not left out without a question', () => {
		const workbook = parted([4, 8, 12]);
		expect(findingsOf(workbook, 'B1')[0].message).toContain('rows 8–10 further below, without a header');
		const { mapping } = first(workbook);
		const whole = { ...mapping.block, lastRow: 10 };
		expect(
			timesOf(answer(workbook, { B1: { key: 'right' } }, { block: whole, leftOutRows: [5, 6, 7] }))
		).toEqual([0, 1, 2, 4, 8, 12]);
	});

	it('and whose times begin anew are another table', () => {
		expect(asked(parted([0, 1, 2]))).toEqual([]);
	});
});

describe('B4: a temperature log below the other unit', () => {
	const logged = (head: string, value: number) =>
		book([['Time (h)', head, 'A (mol/L)'], ...T.map((t, i) => [t, value, A[i]])]);
	const log = (s: ReturnType<typeof answer>) => s.run?.temperatureLog?.map((r) => r.celsius)[0];

	it('is asked about, and read in the unit that is meant', () => {
		expect(asked(logged('T (°C)', 323.15))).toEqual(['B4 B2 B3 B4 B5 B6']);
		expect(log(answer(logged('T (°C)', 323.15), { B4: { key: 'K' } }))).toBe(50);
		expect(log(answer(logged('T (K)', 50), { B4: { key: 'degC' } }))).toBe(50);
		expect(log(answer(logged('T (°C)', 323.15), { B4: { key: 'keep' } }))).toBe(323.15);
	});

	it('is none at -78 °C, 195 K or 150 °C', () => {
		expect(asked(logged('T (°C)', -78))).toEqual([]);
		expect(asked(logged('T (K)', 195))).toEqual([]);
		expect(asked(logged('T (°C)', 150))).toEqual([]);
	});
});

/** Layouts met in laboratories: where header, time and values may stand. */
import { describe, expect, it } from 'vitest';
import { ROWS, book, csv, first } from '../server/sheets/reading/test-tables';

describe('layouts met in labs', () => {
	it('conditions above, units in a second row, a comma file in German', () => {
		const text =
			'Reaktion HX-14;;;\nAnsatz;RS-112;;\nDatum;12.11.2026;;\nTemperatur;50 °C;;\n;;;\nProbe;Zeit;HX-14;HX-14b\n;[min];[Fl.-%];[Fl.-%]\n' +
			'P1;0;99,8;0,2\nP2;15;80,2;19,8\nP3;30;65,1;34,9\nP4;60;44,0;56,0\nP5;120;20,1;79,9\nMittelwert;;61,8;38,2\n';
		const table = first(csv(text));
		expect([table.range, table.headerRows, table.mapping.decimal]).toEqual(['A8:D12', [6, 7], ',']);
		expect(table.columns.map((c) => [c.role, c.unit, c.species])).toEqual([
			['sample', null, null],
			['time', 'min', null],
			['species', 'area %', 'A'],
			['species', 'area %', 'B']
		]);
		expect(table.suggested).toEqual({
			temperature: { value: 50, unit: 'degC', source: 'A4' },
			initial: { A: { value: 99.8, unit: '%', source: 'C8' } }
		});
	});

	it('an instrument’s list with the time in the sample name', () => {
		const rows = [0, 15, 30].flatMap((t, i) => [
			`${i}\tt=${t} min\tA\t3.1\t${1000 - t * 10}`,
			`${i}\tt=${t} min\tB\t4.2\t${t * 10}`
		]);
		const table = first(
			csv(`Sequence report\nMethod\tX\n\nInj #\tSample Name\tPeak\tRT\tArea\n${rows.join('\n')}\n`)
		);
		expect(table.mapping.columns.map((c) => c.role)).toEqual([
			'injection',
			'time',
			'peak',
			'ignore',
			'value'
		]);
		expect(table.findings.map((f) => f.rule)).toContain('B1');
	});

	it('elapsed time is taken before the time of day and the date', () => {
		const day = { v: 46000, format: 'dd.mm.yyyy' };
		const rows = [
			['Date', 'Time of day', 'Elapsed (min)', 'A (mol/L)'],
			...ROWS.map(([t, a]) => [day, { v: 0.4 + Number(t) / 24, format: 'hh:mm' }, Number(t) * 60, a])
		];
		const table = first(book(rows));
		expect(table.mapping.columns.map((c) => c.role)).toEqual(['ignore', 'ignore', 'time', 'species']);
		expect(table.findings).toEqual([]);
	});

	it('sums, comments and counters are left aside; a conversion is asked about', () => {
		const rows = [
			['No.', 'Time [h]', 'A [mmol/L]', 'B [mmol/L]', 'Sum', 'Conversion %', 'Comment'],
			...ROWS.map(([t, a, b], i) => [i, t, a, b, 0.5, 10, 'x'])
		];
		const table = first(book(rows));
		expect(table.mapping.columns.map((c) => c.role)).toEqual([
			'ignore',
			'time',
			'species',
			'species',
			'ignore',
			'species',
			'ignore'
		]);
		expect(table.findings.filter((f) => f.open).map((f) => f.rule)).toEqual(['B32']);
	});
});

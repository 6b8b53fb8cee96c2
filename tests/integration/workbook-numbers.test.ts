import { readFileSync } from 'node:fs';
import XlsxPopulate from 'xlsx-populate';
import { describe, expect, it } from 'vitest';
import { fit } from '../../src/lib/kinetics/fit';
import { fitRequest, type FitReport, type FitRequest } from '../../src/lib/schemas/fit';
import { emptyLayout, SHEETS } from '../../src/lib/server/workbook/layout';
import { planRecalculation } from '../../src/lib/server/workbook/plan';
import { writeNumbers } from '../../src/lib/server/workbook/build';
import { SheetWriter } from '../../src/lib/server/workbook/sheet-writer';
import { recalculate } from './recalculate';

const rows = readFileSync(new URL('../fixtures/s01_clean_50C.csv', import.meta.url), 'utf8')
	.trim()
	.split(/\r?\n/)
	.slice(1)
	.map((line) => line.split(',').map(Number));

const species = ['A', 'B', 'C'].map((id) => ({ id }));
const step = (
	id: string,
	from: string,
	to: string,
	k: number,
	reverse: number | null = null,
	ea?: number
) => ({
	id,
	reactant: from,
	products: [{ species: to }],
	forward: {
		kRef: { value: k, unit: '1/h' },
		...(ea === undefined ? {} : { activationEnergy: { value: ea, unit: 'kJ/mol' } })
	},
	reverse: reverse === null ? null : { kRef: { value: reverse, unit: '1/h' } }
});
const run = (id: string, celsius: number, data: number[][]) => ({
	id,
	temperature: { value: celsius, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	timeUnit: 'h',
	channels: ['A', 'B', 'C'].map((c) => ({ id: c, weights: { [c]: 1 }, unit: 'mol/L' })),
	timepoints: data.map(([time, A, B, C]) => ({ time, values: { A, B, C } }))
});
const request = (steps: unknown[], runs: unknown[], options: Record<string, unknown> = {}): FitRequest =>
	fitRequest.parse({
		species,
		steps,
		referenceTemperature: { value: 50, unit: 'degC' },
		runs,
		options: { starts: 3, profiles: false, ...options }
	});

async function numbers(asked: FitRequest, report: FitReport) {
	const workbook = await XlsxPopulate.fromBlankAsync();
	const open = (name: string) => new SheetWriter(workbook.addSheet(name), name);
	const layout = emptyLayout();
	writeNumbers(open, planRecalculation(asked, report), layout);
	return { book: await recalculate(await workbook.outputAsync()), layout };
}

/** Every formula cell holds what an independent engine calculates for it. */
function expectStoredValues(book: Awaited<ReturnType<typeof recalculate>>): void {
	expect(book.formulas.length).toBeGreaterThan(50);
	for (const { sheet, address, formula, stored } of book.formulas) {
		const found = book.value(sheet, address);
		if (typeof stored === 'number') {
			expect(typeof found, `${sheet}!${address} gives ${JSON.stringify(found)}`).toBe('number');
			expect(Math.abs((found as number) - stored), `${sheet}!${address}`).toBeLessThanOrEqual(
				1e-9 * Math.max(1, Math.abs(stored))
			);
		} else expect(found, `${sheet}!${address} = ${formula}`).toBe(Boolean(Number(stored)));
	}
}

describe('the numbers of the workbook, recalculated by an independent spreadsheet engine', () => {
	// Invented scenario HX-14, tests/fixtures/s01: k1 0.794, k2 0.297, k-2 0.0952 1/h.
	const clean = request([step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1, 1)], [run('r1', 50, rows)]);
	const report = fit(clean);

	it('agrees with what the fit stored to 1e-9, and every check holds', async () => {
		const { book, layout } = await numbers(clean, report);
		expectStoredValues(book);
		for (const check of layout.checks)
			expect(book.value(check.sheet, check.cell.replaceAll('$', '')), check.sheet).toBe(true);
		expect(book.value(SHEETS.residuals, 'B5')).toBeCloseTo(report.weightedSsr, 12);
	});

	it('moves curves, residuals and sum of squares when a constant is changed, and says that it differs', async () => {
		const { book, layout } = await numbers(clean, report);
		const cell = book.beside(SHEETS.parameters, 's1.forward.kRef');
		const before = book.formulas
			.filter((f) => f.sheet === SHEETS.residuals && f.address.startsWith('H'))
			.map((f) => book.value(f.sheet, f.address));
		const ssr = book.value(SHEETS.residuals, 'B5') as number;
		book.set(SHEETS.parameters, cell, 0.8);
		const after = book.formulas
			.filter((f) => f.sheet === SHEETS.residuals && f.address.startsWith('H'))
			.map((f) => book.value(f.sheet, f.address));
		expect(after.filter((v, i) => v !== before[i]).length).toBeGreaterThan(20);
		expect(book.value(SHEETS.residuals, 'B5')).toBeGreaterThan(ssr);
		const failed = layout.checks.filter((c) => book.value(c.sheet, c.cell.replaceAll('$', '')) !== true);
		expect(failed.map((c) => c.sheet).sort()).toEqual(
			[SHEETS.curves, SHEETS.parameters, SHEETS.residuals].sort()
		);
	});

	it('is right for the defective matrix of k 0.4/0.3/0.1', async () => {
		const steps = [step('s1', 'A', 'B', 0.4), step('s2', 'B', 'C', 0.3, 0.1)];
		const fixed = ['s1.forward.kRef', 's2.forward.kRef', 's2.reverse.kRef'];
		const asked = request(
			steps,
			[
				{
					...run('r1', 50, [
						[2.5, 0.18, 0.22, 0.1],
						[5, 0.07, 0.21, 0.22]
					]),
					initial: { A: { value: 1, unit: 'mol/L' } }
				}
			],
			{ fixed }
		);
		const { book } = await numbers(asked, fit(asked));
		expectStoredValues(book);
		// Exact values of the repeated mode: e^{-0.4 t} and its confluent terms, computed apart.
		const predicted = ['H12', 'H13', 'H14'].map((a) => book.value(SHEETS.residuals, a) as number);
		[0.36788, 0.43394, 0.19818].forEach((v, i) => expect(predicted[i]).toBeCloseTo(v, 4));
		expect(book.value(SHEETS.curves, 'B3')).toBe(true);
	});

	it('is right for the complex modes of an irreversible loop', async () => {
		const steps = [step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1), step('s3', 'C', 'A', 1)];
		const fixed = ['s1.forward.kRef', 's2.forward.kRef', 's3.forward.kRef'];
		const asked = request(
			steps,
			[
				{
					...run('r1', 50, [
						[1, 0.43, 0.38, 0.19],
						[2, 0.3, 0.3, 0.3]
					]),
					initial: { A: { value: 1, unit: 'mol/L' } }
				}
			],
			{ fixed }
		);
		const { book } = await numbers(asked, fit(asked));
		expectStoredValues(book);
		const predicted = ['H12', 'H13', 'H14'].map((a) => book.value(SHEETS.residuals, a) as number);
		[0.42971, 0.38328, 0.18702].forEach((v, i) => expect(predicted[i]).toBeCloseTo(v, 4));
		expect(book.value(SHEETS.curves, 'B3')).toBe(true);
	});

	it('gives each of several temperatures a rate matrix of its own, through the activation energies', async () => {
		const data = rows.slice(1, 8);
		const asked = request(
			[step('s1', 'A', 'B', 0.8, null, 72), step('s2', 'B', 'C', 0.3, 0.1, 81)],
			[run('r1', 40, data), run('r2', 50, data), run('r3', 60, data)],
			{ fixed: ['s1.forward.kRef', 's2.forward.kRef', 's2.reverse.kRef'] }
		);
		const { book } = await numbers(asked, fit(asked));
		expectStoredValues(book);
		expect(
			book.texts.filter((t) => t.sheet === SHEETS.scheme && /constants and rate matrix/.test(t.text))
		).toHaveLength(3);
	});

	it('takes the response factor that a run states, also where runs differ', async () => {
		const data = rows.slice(1, 8);
		const factor = (value: number) => [
			{ id: 'A', weights: { A: 1 }, unit: 'mol/L' },
			{ id: 'B', weights: { B: 1 }, unit: 'mol/L', responseFactor: { value, unit: '1' } },
			{ id: 'C', weights: { C: 1 }, unit: 'mol/L' }
		];
		for (const [first, second] of [
			[1.1, 1.3],
			[1, 1.3]
		]) {
			const asked = request(
				[step('s1', 'A', 'B', 1), step('s2', 'B', 'C', 1, 1)],
				[
					first === 1 ? run('r1', 50, data) : { ...run('r1', 50, data), channels: factor(first) },
					{ ...run('r2', 50, data), channels: factor(second) }
				]
			);
			const { book, layout } = await numbers(asked, fit(asked));
			expectStoredValues(book);
			for (const check of layout.checks)
				expect(book.value(check.sheet, check.cell.replaceAll('$', '')), check.sheet).toBe(true);
		}
	});

	it('holds its checks where rates differ by nine decades, with the tolerance that such a ladder has', async () => {
		const fixed = ['s1.forward.kRef', 's1.reverse.kRef', 's2.forward.kRef'];
		const data = [0.01, 1, 100, 1000].map((t) => [t, 0.25, 0.25, 0.01]);
		const asked = request(
			[step('s1', 'A', 'B', 3.6e6, 3.6e6), step('s2', 'B', 'C', 3.6e-3)],
			[run('r1', 50, data)],
			{ fixed }
		);
		const report = fit(asked);
		const { book, layout } = await numbers(asked, report);
		for (const check of layout.checks)
			expect(book.value(check.sheet, check.cell.replaceAll('$', '')), check.sheet).toBe(true);
		// A changed constant is still seen: A and B fall with half the slow constant.
		book.set(SHEETS.parameters, book.beside(SHEETS.parameters, 's2.forward.kRef'), 4e-3);
		expect(book.value(SHEETS.residuals, 'B9')).toBe(false);
	});

	it('uses nothing but plain functions: no array, volatile or linking ones', async () => {
		const { book } = await numbers(clean, report);
		const used = new Set(book.formulas.flatMap((f) => f.formula.match(/[A-Z][A-Z.]*(?=\()/g) ?? []));
		const plain = [
			'ABS',
			'AND',
			'COS',
			'EXP',
			'IF',
			'INT',
			'MAX',
			'MIN',
			'MMULT',
			'MOD',
			'SIN',
			'SQRT',
			'SUM',
			'SUMPRODUCT'
		];
		expect([...used].filter((f) => !plain.includes(f))).toEqual([]);
		expect(book.formulas.every((f) => f.stored !== undefined && f.stored !== null)).toBe(true);
	});
});

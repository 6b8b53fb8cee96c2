/**
 * Whole sheets through the reader: the trial files of an invented reaction, HX-14. Counts and constants are those of the story
 * that the files were made for.
 */
import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { runContent } from '../schemas/run';
import type { Answers, Mapping } from '../schemas/sheet';
import { readBytes } from '../server/sheets/reading/read';
import { propose, settle } from './index';

const read = (name: string) =>
	readBytes(readFileSync(new URL(`../../../tests/fixtures/${name}`, import.meta.url)), name);

const species = [
	{ id: 'A', name: 'HX-14', role: 'starting material' as const, molarMassGPerMol: 214.2 },
	{ id: 'B', name: 'HX-14b', role: 'intermediate' as const },
	{ id: 'C', name: 'lactone', role: 'product' as const }
];
const at50 = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};
const withConditions = (
	mapping: Mapping,
	conditions: NonNullable<Mapping['conditions']> = at50
): Mapping => ({ ...mapping, conditions });
describe('s01, a clean sheet', () => {
	const workbook = read('s01_clean_50C.csv');
	const { tables, findings } = propose(workbook, species);

	it('is one table without a single finding', () => {
		expect(findings).toEqual([]);
		expect(tables.map((t) => [t.range, t.findings])).toEqual([['A2:D13', []]]);
	});

	it('becomes a run with every number as written, in hours and mol/L', () => {
		const { run, open } = settle({ workbook, species, mapping: withConditions(tables[0].mapping) });
		expect(open).toBe(0);
		expect(runContent.parse(run)).toEqual(run);
		expect(run?.timeUnit).toBe('h');
		expect(run?.channels.map((c) => [c.id, c.unit, c.weights])).toEqual([
			['A', 'mol/L', { A: 1 }],
			['B', 'mol/L', { B: 1 }],
			['C', 'mol/L', { C: 1 }]
		]);
		expect(run?.timepoints).toHaveLength(12);
		expect(run?.timepoints[1]).toEqual({
			time: 0.25,
			values: { A: 0.401, B: 0.078, C: 0.007 },
			source: { sheet: 's01_clean_50C', row: 3, cells: { A: 'B3', B: 'C3', C: 'D3' } }
		});
	});

	it('shows a mass balance between 97.2 and 101.6 % and the half-life in words', () => {
		const { massBalance, plausibility } = settle({
			workbook,
			species,
			mapping: withConditions(tables[0].mapping)
		});
		const percent = massBalance?.rows.map((r) => r.percent) ?? [];
		expect([Math.min(...percent).toFixed(1), Math.max(...percent).toFixed(1)]).toEqual(['97.2', '101.6']);
		expect(plausibility[0]).toMatch(/^Half of A is gone after about 53\.3 min/);
	});
});

describe('s03, s07, s08, s09', () => {
	it('s03: a signal in arbitrary units asks for its response factor, which the fit may find', () => {
		const workbook = read('s03_B_signal_only.csv');
		const [table] = propose(workbook, species).tables;
		expect(table.findings.map((f) => f.rule)).toEqual(['B4', 'B33']);
		const { run } = settle({
			workbook,
			species,
			mapping: withConditions(table.mapping),
			answers: { [table.findings[0].id]: { key: 'fit' } }
		});
		expect(run?.channels).toEqual([
			{ id: 'B', weights: { B: 1 }, unit: 'a.u.', responseFactor: { fit: true } }
		]);
		expect(run?.timepoints[3]).toMatchObject({ time: 3, values: { B: 0.67312 } });
	});

	it('s07: constants against temperature are no run, and the message says what is expected', () => {
		const proposal = propose(read('s07_rate_constants_T.csv'), species);
		expect(proposal.tables).toEqual([]);
		expect(proposal.findings.map((f) => [f.level, f.rule])).toEqual([['stop', 'B1']]);
	});

	it('s08: without a sample at time zero the charge is asked', () => {
		const workbook = read('s08_quench_lag.csv');
		const [table] = propose(workbook, species).tables;
		expect(table.findings.map((f) => f.rule)).toEqual(['B33']);
		const answers: Answers = {
			[table.findings[0].id]: { key: 'charge', values: { species: 'A', value: '100', unit: '%' } }
		};
		const { run } = settle({
			workbook,
			species,
			answers,
			mapping: withConditions(table.mapping, {
				temperature: { value: 40, unit: 'degC' },
				initial: {},
				excess: {}
			})
		});
		expect(run?.initial).toEqual({ A: { value: 100, unit: '%' } });
		expect(run?.timeUnit).toBe('min');
		expect(run?.timepoints[0]).toMatchObject({ time: 2, values: { A: 0.7047 } });
		expect(run?.channels[0].unit).toBe('fraction of charge');
	});

	it('s09: replicate columns of one species are recognised, and asked once: separate samples or injections', () => {
		const workbook = read('s09_autocat.csv');
		const [table] = propose(workbook, species).tables;
		const mapping = withConditions(table.mapping);
		const open = settle({ workbook, species, mapping }).findings.filter((f) => f.open);
		expect(open.map((f) => [f.level, f.rule, f.message])).toEqual([
			[
				'ask',
				'B13',
				'Columns B–C for A: the headers number them as replicates. Injections of one sample, or separate samples?'
			]
		]);
		const settleAs = (key: string) =>
			settle({ workbook, species, mapping, answers: { [open[0].id]: { key } } });
		const apart = settleAs('samples').run;
		expect(apart?.timepoints).toHaveLength(18);
		expect(apart?.timepoints.slice(0, 2).map((p) => [p.time, p.values])).toEqual([
			[0.25, { A: 0.901 }],
			[0.25, { A: 0.896 }]
		]);
		expect(apart?.replicates).toBe('samples');
		const averaged = settleAs('injections');
		expect(averaged.run?.timepoints).toHaveLength(9);
		expect(averaged.run?.timepoints[0].values.A).toBeCloseTo(0.8985, 12);
		// Pooled over nine pairs: s² = Σ d²/2 / 9.
		expect(averaged.conversions.join()).toContain('standard deviation of injection 0.00602771');
		expect(settleAs('first').run?.timepoints.map((p) => p.values.A)[0]).toBe(0.901);
	});
});

/** A plain table for the reader's tests, with single cells changed, and what the reader makes of it. */
import { strToU8 } from 'fflate';
import { propose, settle } from '$lib/assay';
import type { Answer, CellCorrection, Finding, GridWorkbook, Mapping } from '$lib/schemas/sheet';
import { readBytes } from './read';
import { oneSheet, type TestCell, type TestOptions, type TestSheet } from './test-workbook';

export const species = [
	{ id: 'A', name: 'HX-14', role: 'starting material' as const },
	{ id: 'B', name: 'HX-14b' },
	{ id: 'C', name: 'lactone' }
];
export const conditions: Mapping['conditions'] = {
	temperature: { value: 50, unit: 'degC' },
	initial: { A: { value: 0.5, unit: 'mol/L' } },
	excess: {}
};

export const HEAD: TestCell[] = ['Time (h)', 'A (mol/L)', 'B (mol/L)'];
export const ROWS: TestCell[][] = [
	[0, 0.5, 0],
	[1, 0.4, 0.1],
	[2, 0.3, 0.2],
	[3, 0.2, 0.3],
	[4, 0.1, 0.4],
	[5, 0.05, 0.45]
];

/** The plain sheet with single cells changed, given by row of data and column. */
export const changed = (cells: Record<string, TestCell>, head = HEAD): TestCell[][] => [
	head,
	...ROWS.map((row, i) => row.map((v, j) => (Object.hasOwn(cells, `${i},${j}`) ? cells[`${i},${j}`] : v)))
];

export const book = (rows: TestCell[][], more: Omit<TestSheet, 'rows'> = {}, options: TestOptions = {}) =>
	readBytes(oneSheet(rows, more, options), 'x.xlsx');
export const csv = (text: string) => readBytes(strToU8(text), 'x.csv');
export const first = (workbook: GridWorkbook, list = species) => propose(workbook, list).tables[0];
export const findingsOf = (workbook: GridWorkbook, rule: string) =>
	first(workbook).findings.filter((f) => f.rule === rule);

/** Times in the first column, A and B beside them. */
export const times = (cells: TestCell[], head = 'Time') =>
	book([[head, 'A (mol/L)'], ...cells.map((t, i) => [t, 0.5 - i * 0.05])]);

/** Settles with answers given by rule; the answer goes to every finding of the rule. */
export function answer(
	workbook: GridWorkbook,
	byRule: Record<string, Answer>,
	mapping?: Partial<Mapping>,
	corrections: CellCorrection[] = []
) {
	const base = { ...first(workbook).mapping, conditions, ...mapping };
	let answers: Record<string, Answer> = {};
	// A later question may only arise once an earlier one is answered.
	for (let round = 0; round < 4; round++) {
		const { findings } = settle({ workbook, species, mapping: base, answers, corrections });
		answers = Object.fromEntries(
			findings.flatMap((f) =>
				Object.hasOwn(byRule, f.rule) && f.level !== 'note' ? [[f.id, byRule[f.rule]]] : []
			)
		);
	}
	return settle({ workbook, species, mapping: base, answers, corrections });
}

export const valuesOf = (s: ReturnType<typeof settle>, id = 'A') =>
	s.run?.timepoints.map((p) => p.values[id]);
export const timesOf = (s: ReturnType<typeof settle>) => s.run?.timepoints.map((p) => p.time);
export const summary = (f: Finding | undefined) => f && [f.level, f.cells.join(' ')];

/** Role, unit and species of every column as proposed. */
export const rolesOf = (workbook: GridWorkbook) =>
	first(workbook).columns.map((c) => [c.role, c.unit, c.species]);
/** Rule and first cell of every question that is open once the conditions are given. */
export const openIn = (workbook: GridWorkbook) => {
	const mapping = { ...first(workbook).mapping, conditions };
	return settle({ workbook, species, mapping }).findings.flatMap((f) =>
		f.open ? [`${f.rule} ${f.cells[0]}`] : []
	);
};
export const notesIn = (workbook: GridWorkbook) =>
	first(workbook).findings.flatMap((f) => (f.level === 'note' ? [f.message] : []));

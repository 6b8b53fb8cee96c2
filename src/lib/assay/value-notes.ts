/** What was done with values without asking, for the record: B7 numbers as text, B11 marks for missing, B26 formulas. */
import { CELL } from '$lib/schemas/sheet';
import type { Channel } from './channels';
import type { Examination } from './examination';
import { figure, plural, someOf } from './wording';
import { hasFlag } from './grid';
import { cellsOf, letter, ofKind, type Spot } from './spots';

export function noteMissing(ex: Examination, channel: Channel, spots: Spot[]): void {
	for (const s of ofKind(spots, 'blank', 'missing')) s.set(null);
	const marked = ofKind(spots, 'missing').filter((s) => s.reading.text !== '' && !s.decided);
	if (marked.length === 0) return;
	const texts = [...new Set(marked.map((s) => `"${s.reading.text}"`))];
	ex.note({
		rule: 'B11',
		cells: cellsOf(marked),
		key: `${letter(channel, marked)}-missing`,
		found: someOf(texts),
		expected: 'a number, a limit, or nothing',
		message: `${someOf(texts)} in ${someOf(cellsOf(marked))}: taken as missing, never as zero.`
	});
}

export function noteTextNumbers(ex: Examination, spots: Spot[]): void {
	const csv = ex.workbook.kind !== 'xlsx';
	const texts = ofKind(spots, 'number').filter(
		(s) => s.reading.text && (!csv || s.reading.odd) && !ex.isCorrected(s.row, s.column)
	);
	if (texts.length === 0) return;
	const example = texts[0];
	ex.note({
		rule: 'B7',
		cells: cellsOf(texts),
		key: 'text-numbers',
		found: plural(texts.length, 'number written as text', 'numbers written as text'),
		expected: 'numbers stored as numbers',
		message: `${plural(texts.length, 'number is', 'numbers are')} stored as text or with unusual signs (${someOf(cellsOf(texts))}); ${texts.length === 1 ? 'it was' : 'they were'} read as numbers, for example "${ex.shown(example.row, example.column).slice(0, 30)}" as ${figure(example.reading.value)}.`
	});
}

export function noteFormulas(ex: Examination, spots: Spot[]): void {
	const formulas = spots.filter((s) => {
		const cell = ex.view.cell(s.row, s.column);
		return cell !== undefined && hasFlag(cell, CELL.formula) && !hasFlag(cell, CELL.uncomputed);
	});
	if (formulas.length === 0) return;
	ex.note({
		rule: 'B26',
		cells: cellsOf(formulas),
		key: 'formulas',
		found: plural(formulas.length, 'formula', 'formulas'),
		expected: 'values, or formulas with their stored results',
		message: `${plural(formulas.length, 'cell is a formula', 'cells are formulas')} (${someOf(cellsOf(formulas))}); the result stored in the file was used.`
	});
}

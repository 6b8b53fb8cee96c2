/** B29: hidden rows, columns and sheets and active filters are shown and asked about, never dropped or used silently. */
import type { Examination } from './examination';
import { capital } from './wording';

/** B29: hidden rows, columns and sheets, active filters. Rows that the person leaves out are returned. */
export function askHidden(ex: Examination, rows: number[]): Set<number> {
	const { view, mapping, places } = ex;
	if (view.sheet.state !== 'visible') askHiddenSheet(ex);
	const hidden = rows.filter((r) => view.rowHidden(r));
	const out = new Set<number>();
	if (hidden.length > 0) {
		const why = view.sheet.filter ? ` (a filter is on: ${view.sheet.filter})` : '';
		const taken = ex.ask({
			rule: 'B29',
			level: 'ask',
			cells: hidden.map((r) => ex.at(r, mapping.block.firstColumn)),
			key: 'rows',
			found: `${places.samples(hidden)} hidden${why}`,
			expected: `a choice; hidden ${places.line}s are neither dropped nor used silently`,
			message: `${capital(places.samples(hidden))} of "${ex.sheet}" ${hidden.length === 1 ? 'is' : 'are'} hidden${why}. Do they belong to the data?`,
			options: [
				{ key: 'include', label: 'Use them too' },
				{ key: 'leave-out', label: 'Leave them out' }
			]
		});
		if (taken?.key === 'leave-out') {
			hidden.forEach((r) => out.add(r));
			ex.conversions.push(`Hidden ${places.samples(hidden)} left out.`);
		}
	}
	askHiddenColumns(ex);
	return out;
}

function askHiddenSheet(ex: Examination): void {
	ex.ask({
		rule: 'B29',
		level: 'ask',
		cells: [ex.at(ex.mapping.block.firstRow, ex.mapping.block.firstColumn)],
		key: 'sheet',
		found: `sheet "${ex.sheet}" is ${ex.view.sheet.state}`,
		expected: 'a choice; hidden sheets are not used silently',
		message: `Sheet "${ex.sheet}" is hidden in the file. Use this table all the same?`,
		options: [{ key: 'include', label: 'Use it' }]
	});
}

function askHiddenColumns(ex: Examination): void {
	const hidden = ex.mapping.columns.filter((c) => c.role !== 'ignore' && ex.view.columnHidden(c.column));
	if (hidden.length === 0) return;
	const names = ex.places.manySeries(hidden.map((c) => c.column));
	const word = ex.places.across ? 'row' : 'column';
	const taken = ex.ask({
		rule: 'B29',
		level: 'ask',
		cells: hidden.map((c) => ex.at(ex.mapping.block.firstRow, c.column)),
		key: 'columns',
		found: `hidden ${names}`,
		expected: `a choice; hidden ${word}s are neither dropped nor used silently`,
		message: `${capital(names)} of "${ex.sheet}" ${hidden.length === 1 ? 'is' : 'are'} hidden. Do they belong to the data?`,
		options: [
			{ key: 'include', label: 'Use them too' },
			{ key: 'leave-out', label: 'Leave them out' }
		]
	});
	if (taken?.key !== 'leave-out') return;
	for (const c of hidden) c.role = 'ignore';
	ex.conversions.push(`Hidden ${names} left out.`);
}

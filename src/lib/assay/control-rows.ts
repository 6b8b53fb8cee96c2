/** Rows of blanks, standards, controls and means in a list (B27): they are no samples of the reaction, and are asked about. */
import type { Examination } from './examination';
import { plural, someOf } from './wording';
import { isControlName, isStatisticName } from './words';

const isNoSample = (name: string): boolean => isControlName(name) || isStatisticName(name);

/** Rows that are left out. */
export function askControls(ex: Examination, rows: number[]): Set<number> {
	const names = new Map<number, { cell: string; name: string }>();
	const columns = ex.mapping.columns.filter((c) => c.role === 'sample' || c.role === 'ignore');
	for (const row of rows)
		for (const { column } of columns) {
			const name = ex.view.cell(row, column)?.[1];
			if (typeof name === 'string' && isNoSample(name) && !names.has(row))
				names.set(row, { cell: ex.at(row, column), name: name.trim() });
		}
	if (names.size === 0 || names.size === rows.length) return new Set();
	const found = someOf([...new Set([...names.values()].map((n) => `"${n.name}"`))]);
	const one = names.size === 1;
	const what = [...names.values()].every((n) => isStatisticName(n.name))
		? one
			? 'a mean or spread of other rows'
			: 'means or spreads of other rows'
		: one
			? 'a blank, standard or control'
			: 'blanks, standards or controls';
	const taken = ex.ask({
		rule: 'B27',
		level: 'ask',
		cells: [...names.values()].map((n) => n.cell),
		key: 'controls',
		found: `${plural(names.size, 'row')} named ${found}`,
		expected: 'samples of the reaction only',
		message: `${plural(names.size, 'row')} (${found}) ${one ? 'seems' : 'seem'} to be ${what}, not ${one ? 'a sample' : 'samples'} of the reaction. Leave ${one ? 'it' : 'them'} out?`,
		options: [
			{ key: 'leave-out', label: one ? 'Leave it out' : 'Leave them out' },
			{ key: 'include', label: one ? 'It is a sample: use it' : 'They are samples: use them' }
		]
	});
	if (taken?.key === 'include') return new Set();
	if (taken)
		ex.conversions.push(`${plural(names.size, 'row')} (${found}) left out: no samples of the reaction.`);
	return new Set(names.keys());
}

/** B4 for several columns alike: columns without a unit, or in % without a basis, are asked about together, or one by one where they differ. */
import { type ColumnMapping, VALUE_UNITS } from '$lib/schemas/sheet';
import { headerCell } from './channels';
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { asUnit, isPercent, PERCENT_BASES, unitLabel, unknownUnit } from './value-unit';
import { capital } from './wording';

/** The columns whose unit is still open after the common question; each of the others is asked by itself. */
export function askCommonUnits(
	ex: Examination,
	columns: ColumnMapping[],
	headers: Map<number, ColumnHeader>
): Set<number> {
	const open = new Set<number>();
	const bare = columns.filter((c) => !asUnit(c.unit) && !unknownUnit(headers.get(c.column)));
	for (const percent of [true, false]) {
		const alike = bare.filter((c) => isPercent(ex, headers.get(c.column)) === percent);
		if (alike.length < 2) continue;
		const places = ex.places.manySeries(alike.map((c) => c.column));
		const taken = ex.ask({
			rule: 'B4',
			level: 'stop',
			cells: alike.map((c) => headerCell(ex, c.column)),
			key: percent ? 'units-percent' : 'units',
			found: percent ? `${places} in %` : `${places} without a unit`,
			expected: percent ? 'what the % are of' : 'a unit for each',
			message: percent
				? `${capital(places)} are in %. Percent of what? We will not assume.`
				: `${capital(places)} have no unit. Choose one; we will not assume.`,
			options: [
				...(percent ? PERCENT_BASES : VALUE_UNITS).map((unit) => ({
					key: unit,
					label: unitLabel(unit)
				})),
				{ key: 'each', label: 'They differ: ask for each' }
			]
		});
		if (taken?.key === 'each') continue;
		for (const c of alike) {
			if (taken) c.unit = taken.key;
			else open.add(c.column);
		}
		if (taken) ex.conversions.push(`Unit of ${places}: ${taken.key}, as chosen.`);
	}
	return open;
}

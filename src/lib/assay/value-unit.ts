/** B4: the unit of a column of values is stated or asked, never assumed. */
import { VALUE_UNITS, type ValueUnit } from '$lib/schemas/sheet';
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { capital } from './wording';

export const asUnit = (unit: string | null): ValueUnit | null =>
	VALUE_UNITS.includes(unit as ValueUnit) ? (unit as ValueUnit) : null;

export const PERCENT_BASES: ValueUnit[] = ['area %', '% of charge', 'mol %', '% w/w'];

export const isPercent = (ex: Examination, header: ColumnHeader | undefined): boolean =>
	header?.unit?.of === 'percent' || isPercentColumn(ex, header?.column);

/** What stands in brackets where a unit is expected and is none that is known here, such as "mg/g". */
export const unknownUnit = (header: ColumnHeader | undefined): string | null =>
	header?.unit === null && header.bracket !== null && /[/·⁻^]|^(?:ppm|ppb)$/i.test(header.bracket)
		? header.bracket
		: null;

export function askUnit(
	ex: Examination,
	c: { unit: string | null },
	header: ColumnHeader | undefined,
	cell: string
): void {
	if (asUnit(c.unit)) return;
	const percent = isPercent(ex, header);
	const unknown = unknownUnit(header);
	const place = header ? ex.places.series(header.column) : `the column of ${cell}`;
	const taken = ex.ask({
		rule: 'B4',
		level: 'stop',
		cells: [cell],
		found: percent ? `${place} in %` : `${place} without a unit`,
		expected: percent ? 'what the % are of' : 'a unit',
		message: percent
			? `${capital(place)} is in %. Percent of what? We will not assume.`
			: unknown
				? `${capital(place)} is headed "${unknown}", which is no unit that is read here. Choose the one that the values are in; we will not assume.`
				: `${capital(place)} has no unit. Choose one; we will not assume.`,
		options: (percent ? PERCENT_BASES : VALUE_UNITS).map((unit) => ({ key: unit, label: unitLabel(unit) }))
	});
	if (!taken) return;
	c.unit = taken.key;
	ex.conversions.push(`Unit of ${place}: ${taken.key}, as chosen.`);
}

export const unitLabel = (unit: ValueUnit): string =>
	unit === 'area' ? 'area (a signal, arbitrary units)' : unit === 'umol/L' ? 'µmol/L' : unit;

function isPercentColumn(ex: Examination, column: number | undefined): boolean {
	if (column === undefined) return false;
	const { firstRow, lastRow } = ex.mapping.block;
	for (let r = firstRow; r <= Math.min(lastRow, firstRow + 20); r++) {
		const reading = ex.value(r, column);
		if (reading.kind === 'number') return reading.percent;
	}
	return false;
}

/** One kind of time and one unit for the time column: B4 for times without a unit, B17 for mixed ones. */
import { TIME_UNITS, type TimeUnit } from '$lib/schemas/sheet';
import { headerCell } from './channels';
import type { ColumnHeader } from './columns';
import type { Examination } from './examination';
import { because, capital, plural, someOf } from './wording';
import type { Sample } from './samples';
import type { TimeReading } from './times';

const family = (r: TimeReading): string =>
	r.kind === 'serial' || r.kind === 'colon'
		? 'durations'
		: r.kind === 'stamp'
			? 'dates with time'
			: r.kind === 'worded'
				? 'times with their unit'
				: 'plain numbers';

/** B17: a column holds one kind of time; corrections are typed and may differ. Gives the places of the rows that are left out. */
export function stopMixedKinds(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	column: number
): Set<number> {
	const kinds = new Map<string, { cells: string[]; at: number[] }>();
	samples.forEach((s, i) => {
		if (ex.isCorrected(s.time.row, s.time.column)) return;
		if (readings[i].kind === 'number' && (readings[i] as { value: number }).value === 0) return;
		const own = kinds.get(family(readings[i])) ?? { cells: [], at: [] };
		own.cells.push(ex.at(s.time.row, s.time.column));
		own.at.push(i);
		kinds.set(family(readings[i]), own);
	});
	// Plain numbers beside times with their unit are asked about by `timeUnit`.
	const mixed = [...kinds].filter(([kind]) => kind !== 'times with their unit');
	if (mixed.length < 2) return new Set();
	const what = mixed.map(([kind, { cells }]) => `${kind} (${someOf(cells, 2)})`).join(' and ');
	const [[kind, rare]] = mixed.sort((a, b) => a[1].at.length - b[1].at.length);
	const taken = ex.ask({
		rule: 'B17',
		level: 'stop',
		cells: rare.cells,
		key: 'kinds',
		found: what,
		expected: 'one kind of time in the column',
		message: `${capital(ex.places.series(column))} mixes ${what}. Correct the cells that differ, or leave their ${ex.places.line}s out.`,
		options: [
			{ key: 'leave-out', label: `Leave the ${ex.places.line}s with ${kind} out (${someOf(rare.cells)})` }
		]
	});
	if (!taken) return new Set();
	ex.conversions.push(
		`${someOf(rare.cells, 8)}: left out, ${kind} among other times${because(taken.reason)}.`
	);
	return new Set(rare.at);
}

export interface UnitFound {
	unit: TimeUnit;
	/** The column holds plain numbers in this unit. */
	stated: boolean;
}

export function timeUnit(
	ex: Examination,
	samples: Sample[],
	readings: TimeReading[],
	header: ColumnHeader | undefined,
	column: number
): UnitFound {
	const mapped = ex.mapping.columns.find((c) => c.role === 'time');
	const stated = TIME_UNITS.includes(mapped?.unit as TimeUnit) ? (mapped?.unit as TimeUnit) : null;
	// A bare 0 is zero in every unit.
	const plain = readings.filter((r) => r.kind === 'number' && r.value !== 0);
	const worded = readings.flatMap((r, i) => (r.kind === 'worded' ? [{ r, s: samples[i] }] : []));
	const serial = readings.some((r) => r.kind === 'serial' || r.kind === 'colon' || r.kind === 'stamp');
	if (worded.length > 0) return wordedUnit(ex, worded, stated, plain.length, column);
	if (serial) return { unit: 'h', stated: false };
	if (stated) return { unit: stated, stated: true };
	const taken = ex.ask({
		rule: 'B4',
		level: 'stop',
		cells: [headerCell(ex, column)],
		found: `time ${ex.places.series(column)}${header?.header ? `, "${header.header}",` : ''} without a unit`,
		expected: 's, min, h or d',
		message: `Time ${ex.places.series(column)} has no unit. Choose one; we will not assume.`,
		options: TIME_UNITS.map((unit) => ({ key: unit, label: unit }))
	});
	if (!taken) return { unit: 'h', stated: false };
	if (mapped) mapped.unit = taken.key;
	ex.conversions.push(`Unit of time ${ex.places.series(column)}: ${taken.key}, as chosen.`);
	return { unit: taken.key as TimeUnit, stated: true };
}

/** B17: times that carry their unit, against the column's unit or against each other. */
function wordedUnit(
	ex: Examination,
	worded: { r: TimeReading & { kind: 'worded' }; s: Sample }[],
	stated: TimeUnit | null,
	plain: number,
	column: number
): UnitFound {
	const units = new Set(worded.flatMap(({ r }) => r.units));
	const target = stated ?? (units.has('h') ? 'h' : [...units][0]);
	const cells = worded.map(({ s }) => ex.at(s.time.row, s.time.column));
	const foreign = stated ? worded.some(({ r }) => r.units.some((u) => u !== stated)) : units.size > 1;
	if (!stated && plain > 0) {
		const taken = ex.ask({
			rule: 'B17',
			level: 'stop',
			cells,
			key: 'plain',
			found: `${plural(plain, 'plain number')} beside times with their unit`,
			expected: 'one unit for the column',
			message: `${capital(ex.places.series(column))} holds plain numbers and times such as "${worded[0].r.text}". What are the plain numbers in? We will not assume.`,
			options: TIME_UNITS.map((unit) => ({ key: unit, label: `Plain numbers are in ${unit}` }))
		});
		if (!taken) return { unit: target, stated: false };
		const mapped = ex.mapping.columns.find((c) => c.role === 'time');
		if (mapped) mapped.unit = taken.key;
		ex.conversions.push(
			`Plain numbers of ${ex.places.series(column)} read in ${taken.key}, as chosen; the others by their own unit.`
		);
		return { unit: taken.key as TimeUnit, stated: true };
	}
	if (foreign) {
		const example = stated ? worded.find(({ r }) => r.units.some((u) => u !== stated)) : worded[0];
		ex.ask({
			rule: 'B17',
			level: stated ? 'ask' : 'stop',
			cells,
			key: 'units',
			found: `"${example?.r.text}" in a column in ${stated ?? [...units].join(' and ')}`,
			expected: `times in ${target}`,
			message: stated
				? `"${example?.r.text}" stands in a column in ${stated}. Convert it to ${stated} by its own unit?`
				: `${capital(ex.places.series(column))} mixes time units (${[...units].join(', ')}). Convert each time by its own unit to ${target}?`,
			options: [{ key: 'convert', label: `Convert to ${target}` }]
		});
	}
	ex.conversions.push(
		`${plural(worded.length, 'time')} read with its own unit and given in ${target} (${someOf(cells)}).`
	);
	return { unit: target, stated: true };
}

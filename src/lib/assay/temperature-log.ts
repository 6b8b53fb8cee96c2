/** The temperature column as a log in °C, and the values far from its middle. */
import type { ColumnMapping } from '$lib/schemas/sheet';
import type { CellReading } from './cells';
import type { Examination } from './examination';
import { capital, figure } from './wording';
import { median } from './statistics';
import type { Point } from './timepoints';

export interface TemperatureLog {
	rows: { time: number; celsius: number; cell: string }[];
	open: boolean;
}

/** The temperature column as a log in °C; values far from its median are pointed out. */
export function temperatureLog(ex: Examination, points: Point[]): TemperatureLog {
	const column = ex.mapping.columns.find((c) => c.role === 'temperature');
	if (!column) return { rows: [], open: false };
	if (column.unit !== 'degC' && column.unit !== 'K') {
		const place = `temperature ${ex.places.series(column.column)}`;
		const head = ex.mapping.headerRows.map((r) => ex.shown(r, column.column)).join(' ');
		const fahrenheit = /°\s*F\b|deg\.? ?F\b|fahrenheit/i.test(head);
		const taken = ex.ask({
			rule: 'B4',
			level: 'stop',
			cells: [ex.at(ex.mapping.headerRows.at(-1) ?? ex.mapping.block.firstRow, column.column)],
			found: `${place} without a unit`,
			expected: '°C or K',
			message: fahrenheit
				? `${capital(place)} is headed in °F, which is not read here. Convert it to °C on the sheet, or leave the log out.`
				: `${capital(place)} has no unit. Choose one; we will not assume.`,
			options: [
				...(fahrenheit
					? []
					: [
							{ key: 'degC', label: '°C' },
							{ key: 'K', label: 'K' }
						]),
				{ key: 'ignore', label: 'Do not use the log' }
			]
		});
		if (!taken) return { rows: [], open: true };
		if (taken.key === 'ignore') {
			column.role = 'ignore';
			ex.conversions.push(`${capital(place)}: not used.`);
			return { rows: [], open: false };
		}
		column.unit = taken.key;
	}
	const seen = new Set<number>();
	const rows = points.flatMap((p) => {
		const celsius = celsiusOf(ex.value(p.row, column.column), column.unit);
		if (celsius === null || p.time === null || seen.has(p.row)) return [];
		seen.add(p.row);
		return [
			{
				time: p.time,
				celsius: Number(celsius.toPrecision(12)),
				cell: ex.at(p.row, column.column)
			}
		];
	});
	if (!askOtherScale(ex, rows, column)) return { rows, open: true };
	noteExcursions(ex, rows);
	return { rows, open: false };
}

/** Readings in °C between which the middle of a log lies; outside, the other unit is what is usually meant. */
const LIKELY = { low: -100, high: 250 };

/** B4: a log of 323 °C or 50 K has the other unit in its header. True when it can be used; readings are corrected in place. */
function askOtherScale(ex: Examination, rows: TemperatureLog['rows'], column: ColumnMapping): boolean {
	if (rows.length === 0) return true;
	const middle = median(rows.map((r) => r.celsius));
	const kelvin = column.unit === 'K';
	const other = kelvin ? middle + 273.15 : middle - 273.15;
	const likely = (t: number) => t >= LIKELY.low && t <= LIKELY.high;
	if (likely(middle) || !likely(other)) return true;
	const [unit, meant] = kelvin ? ['K', '°C'] : ['°C', 'K'];
	const shown = figure(Number((kelvin ? other : middle).toFixed(2)));
	const taken = ex.ask({
		rule: 'B4',
		level: 'ask',
		cells: rows.map((r) => r.cell),
		key: `temperature-${ex.places.mark(column.column)}`,
		found: `about ${shown} ${unit}`,
		expected: 'temperatures of a solution',
		message: `The temperatures of ${ex.places.series(column.column)} lie about ${shown} ${unit}, as headed. Or are they in ${meant}?`,
		options: [
			{ key: kelvin ? 'degC' : 'K', label: `They are in ${meant}` },
			{ key: 'keep', label: `${shown} ${unit} is right` }
		]
	});
	if (!taken || taken.key === 'keep') return taken !== null;
	for (const r of rows)
		r.celsius = Number((kelvin ? r.celsius + 273.15 : r.celsius - 273.15).toPrecision(12));
	column.unit = taken.key;
	ex.conversions.push(`Unit of ${ex.places.series(column.column)}: ${meant}, as chosen, not ${unit}.`);
	return true;
}

/** A number in the column's unit, or one that carries its own ("50 °C"); null where the cell holds no temperature. */
function celsiusOf(reading: CellReading, unit: string | null): number | null {
	if (reading.kind !== 'number' && reading.kind !== 'with unit') return null;
	const own = reading.kind === 'with unit' ? reading.unit : null;
	if (own && own.of !== 'temperature') return null;
	return (own?.unit ?? unit) === 'K' ? reading.value - 273.15 : reading.value;
}

function noteExcursions(ex: Examination, rows: TemperatureLog['rows']): void {
	if (rows.length < 4) return;
	const middle = median(rows.map((r) => r.celsius));
	const spread = median(rows.map((r) => Math.abs(r.celsius - middle)));
	const limit = Math.max(ex.checks.temperatureK, 6 * spread);
	for (const r of rows.filter((r) => Math.abs(r.celsius - middle) > limit).slice(0, 20))
		ex.note({
			rule: 'A7',
			cells: [r.cell],
			found: `${figure(r.celsius)} °C`,
			expected: `about ${figure(Number(middle.toFixed(1)))} °C`,
			message: `${r.cell}: ${figure(r.celsius)} °C lies ${figure(Number(Math.abs(r.celsius - middle).toFixed(1)))} K from the middle of the log (${figure(Number(middle.toFixed(1)))} °C). An excursion, or a reading error?`
		});
}

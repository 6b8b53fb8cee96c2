/** The temperature column as a log in °C, and the values far from its middle. */
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
	noteExcursions(ex, rows);
	return { rows, open: false };
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

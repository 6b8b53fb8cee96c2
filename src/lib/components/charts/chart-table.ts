import { significant } from '$lib/client/numbers';
import type { TableColumn } from '$lib/client/table';
import { valueAt } from './geometry';
import type { ChartAxis, ChartBand, ChartSeries } from './types';

export interface ChartRow {
	x: number;
	[cell: string]: number | string | null;
}

const EVEN_ROWS = 25;

/** Times of the table: those measured; without measurements an even grid over the curves. */
function times(series: ChartSeries[]): number[] {
	const measured = new Set(series.flatMap((s) => s.points?.map((p) => p.x) ?? []));
	if (measured.size) return [...measured].sort((a, b) => a - b);
	const grid = series.find((s) => s.curve)?.curve?.x;
	if (!grid || grid.length === 0) return [];
	const end = grid[grid.length - 1];
	return Array.from({ length: EVEN_ROWS }, (_, i) => grid[0] + ((end - grid[0]) * i) / (EVEN_ROWS - 1));
}

const orNull = (value: number): number | null => (Number.isFinite(value) ? value : null);

function bandCells(row: ChartRow, key: string, band: ChartBand | undefined, x: number) {
	if (!band) return;
	row[`${key}-low`] = orNull(valueAt(band.x, band.low, x));
	row[`${key}-high`] = orNull(valueAt(band.x, band.high, x));
}

/** The numbers of a chart as a table: measured, curve and bands of every series at one time in one row. */
export function chartTable(
	series: ChartSeries[],
	x: ChartAxis,
	y: ChartAxis,
	at?: (x: number) => Record<string, number>
): { columns: TableColumn<ChartRow>[]; rows: ChartRow[] } {
	const number = (key: string, label: string, unit: string): TableColumn<ChartRow> => ({
		key,
		label,
		unit,
		align: 'right',
		text: (row) => {
			const value = row[key];
			return typeof value === 'number' ? significant(value, 4) : (value ?? '–');
		}
	});
	const columns: TableColumn<ChartRow>[] = [{ ...number('x', x.label, x.unit), head: true }];
	for (const s of series) {
		if (s.points?.length) columns.push(number(`${s.id}-points`, `${s.label} measured`, y.unit));
		if (s.curve)
			columns.push(number(`${s.id}-curve`, s.points?.length ? `${s.label} curve` : s.label, y.unit));
		if (s.confidence) {
			columns.push(number(`${s.id}-confidence-low`, `${s.label} 95 % confidence, low`, y.unit));
			columns.push(number(`${s.id}-confidence-high`, `${s.label} 95 % confidence, high`, y.unit));
		}
		if (s.prediction) {
			columns.push(number(`${s.id}-prediction-low`, `${s.label} 95 % prediction, low`, y.unit));
			columns.push(number(`${s.id}-prediction-high`, `${s.label} 95 % prediction, high`, y.unit));
		}
	}
	const rows = times(series).map((time) => {
		const row: ChartRow = { x: time };
		const exact = at?.(time);
		for (const s of series) {
			const here = s.points?.filter((p) => p.x === time) ?? [];
			if (here.length === 1 && !here[0].below && !here[0].excluded) row[`${s.id}-points`] = here[0].y;
			else if (here.length)
				row[`${s.id}-points`] = here
					.map((p) => `${p.below ? '<' : ''}${p.y}${p.excluded ? ' (excluded)' : ''}`)
					.join('; ');
			if (s.curve) row[`${s.id}-curve`] = exact?.[s.id] ?? orNull(valueAt(s.curve.x, s.curve.y, time));
			bandCells(row, `${s.id}-confidence`, s.confidence, time);
			bandCells(row, `${s.id}-prediction`, s.prediction, time);
		}
		return row;
	});
	return { columns, rows };
}

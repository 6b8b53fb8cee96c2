/** Where the keyboard goes on the sheet, and how far the sheet has to scroll to show it. */
import { address, parseAddress } from '$lib/assay';
import { HEAD_PX, NUMBER_PX, placeOf, ROW_PX, type GridLayout } from './grid-layout';

const STEPS: Record<string, [rows: number, columns: number]> = {
	ArrowDown: [1, 0],
	ArrowUp: [-1, 0],
	ArrowRight: [0, 1],
	ArrowLeft: [0, -1],
	PageDown: [12, 0],
	PageUp: [-12, 0]
};

const within = (n: number, length: number): number => Math.min(length - 1, Math.max(0, n));

/** The cell that a key leads to from this one; null for a key that means nothing there. */
export function nextCell(layout: GridLayout, from: string | null, key: string, control = false): string | null {
	const { rows, columns } = layout;
	if (rows.length === 0 || columns.length === 0) return null;
	const at = from ? parseAddress(from) : null;
	const column = at ? within(placeOf(columns, at.column), columns.length) : 0;
	if (key === 'Home' || key === 'End') {
		const [row, end] = [at?.row ?? rows[0], key === 'End'];
		if (control) return address(end ? rows[rows.length - 1] : rows[0], columns[column]);
		return address(row, end ? columns[columns.length - 1] : columns[0]);
	}
	const step = STEPS[key];
	if (!step || control) return null;
	const row = at ? placeOf(rows, at.row) : -1;
	return address(
		rows[within(row + step[0], rows.length)],
		columns[within(column + step[1], columns.length)]
	);
}

export interface Box {
	scrollTop: number;
	scrollLeft: number;
	width: number;
	/** Height of what the window shows of the box. */
	height: number;
}

/** Where the box has to be scrolled to for a cell to be in sight; it stays where the cell is in sight already. */
export function scrollTo(layout: GridLayout, cell: string, box: Box): { top: number; left: number } {
	const at = parseAddress(cell);
	let { scrollTop: top, scrollLeft: left } = box;
	if (!at) return { top, left };
	const y = placeOf(layout.rows, at.row) * ROW_PX;
	const room = Math.max(3 * ROW_PX, box.height - HEAD_PX - ROW_PX);
	if (y < top || y > top + room - ROW_PX) top = Math.max(0, y - room / 3);
	const i = layout.columns.indexOf(at.column);
	if (i >= 0) {
		const [from, to] = [layout.lefts[i], layout.lefts[i + 1]];
		if (from - NUMBER_PX < left) left = from - NUMBER_PX;
		else if (to > left + box.width) left = to - box.width;
	}
	return { top, left };
}

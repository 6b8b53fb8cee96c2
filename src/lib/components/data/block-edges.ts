/** Moving the edges of the block that counts as the data, by mouse and by keyboard alike. */
import { columnLetter } from '$lib/assay';
import type { Block } from '$lib/schemas/sheet';
import type { GridLayout } from './grid-layout';

export const EDGES = ['top', 'bottom', 'left', 'right', 'move'] as const;
export type Edge = (typeof EDGES)[number];

export const EDGE_WORDS: Record<Edge, string> = {
	top: 'First row of the data',
	bottom: 'Last row of the data',
	left: 'First column of the table',
	right: 'Last column of the table',
	move: 'The whole table'
};

const within = (n: number, low: number, high: number): number => Math.min(high, Math.max(low, n));

/** The block with one edge at this row or column; it keeps at least two rows and two columns. */
export function withEdge(block: Block, edge: Edge, row: number, column: number): Block {
	const { firstRow, lastRow, firstColumn, lastColumn } = block;
	if (edge === 'top') return { ...block, firstRow: within(row, 1, lastRow - 1) };
	if (edge === 'bottom') return { ...block, lastRow: Math.max(row, firstRow + 1) };
	if (edge === 'left') return { ...block, firstColumn: within(column, 1, lastColumn - 1) };
	if (edge === 'right') return { ...block, lastColumn: Math.max(column, firstColumn + 1) };
	return block;
}

/** The whole block by so many rows and columns, as far as the sheet reaches. */
export function moved(block: Block, rows: number, columns: number, layout: GridLayout): Block {
	const lastRow = Math.max(block.lastRow, layout.rows.at(-1) ?? 1);
	const lastColumn = Math.max(block.lastColumn, layout.columns.at(-1) ?? 1);
	const down = within(rows, 1 - block.firstRow, lastRow - block.lastRow);
	const right = within(columns, 1 - block.firstColumn, lastColumn - block.lastColumn);
	return {
		firstRow: block.firstRow + down,
		lastRow: block.lastRow + down,
		firstColumn: block.firstColumn + right,
		lastColumn: block.lastColumn + right
	};
}

/** The entry of a list `by` places after (or before) the one at or next to `from`. */
function stepIn(list: number[], from: number, by: number): number {
	if (list.length === 0) return from;
	const found = list.findIndex((n) => n >= from);
	const at = found < 0 ? list.length - 1 : found;
	return list[within(at + by, 0, list.length - 1)];
}

const STEPS: Record<string, [rows: number, columns: number]> = {
	ArrowUp: [-1, 0],
	ArrowDown: [1, 0],
	ArrowLeft: [0, -1],
	ArrowRight: [0, 1]
};

/** What an arrow key does to an edge; null for a key that means nothing there. Shift goes ten at a time. */
export function keyedEdge(block: Block, edge: Edge, key: string, layout: GridLayout, shift = false): Block | null {
	const step = STEPS[key];
	if (!step) return null;
	const [rows, columns] = step.map((n) => n * (shift ? 10 : 1));
	if (edge === 'move') return moved(block, rows, columns, layout);
	const vertical = edge === 'top' || edge === 'bottom';
	if (vertical ? rows === 0 : columns === 0) return null;
	const row = stepIn(layout.rows, edge === 'top' ? block.firstRow : block.lastRow, rows);
	const column = stepIn(layout.columns, edge === 'left' ? block.firstColumn : block.lastColumn, columns);
	return withEdge(block, edge, row, column);
}

export const sameBlock = (a: Block, b: Block): boolean =>
	a.firstRow === b.firstRow &&
	a.lastRow === b.lastRow &&
	a.firstColumn === b.firstColumn &&
	a.lastColumn === b.lastColumn;

export const contains = (b: Block, row: number, column: number): boolean =>
	row >= b.firstRow && row <= b.lastRow && column >= b.firstColumn && column <= b.lastColumn;

/** "rows 6 to 20, columns A to H". */
export const blockWords = (block: Block): string =>
	`rows ${block.firstRow} to ${block.lastRow}, columns ${columnLetter(block.firstColumn)} to ${columnLetter(block.lastColumn)}`;

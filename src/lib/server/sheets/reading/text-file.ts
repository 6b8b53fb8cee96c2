/** Text tables (.csv, .tsv, .txt, clipboard): encoding, separator, cells. Every cell stays text; numbers are read later by rule. */
import type { GridCell, GridRow, GridWorkbook } from '$lib/schemas/sheet';
import { utf16Of } from './detect';
import { CELL_TEXT, type ReadingLimits } from './limits';
import { SheetRefusal } from './refusal';
import { readRows } from './separated';

const MOST_COLUMNS = 16_384;

/** @throws SheetRefusal */
export function readText(bytes: Uint8Array, fileName: string, limits: ReadingLimits): GridWorkbook {
	const { text, encoding } = decode(bytes);
	return { ...gridOfText(text, fileName, limits), encoding };
}

/** The clipboard of a spreadsheet program, by the same rules as a text file. */
export function gridOfText(
	text: string,
	fileName: string,
	limits: ReadingLimits,
	kind: 'text' | 'paste' = 'text'
): GridWorkbook {
	if (/^\s*<(?:!doctype|html|\?xml|table)/i.test(text.slice(0, 200)))
		throw new SheetRefusal(
			'not-a-sheet',
			'This is a web page or XML saved under another name. Open it in your spreadsheet program, save it as .xlsx and upload that.'
		);
	const { body: received, declared } = separatorLine(text);
	const aligned = declared === null ? alignedBySpaces(received) : null;
	const body = aligned ?? received;
	const delimiter = declared ?? (aligned === null ? separatorOf(body) : '\t');
	const rows: GridRow[] = [];
	let lastColumn = 0;
	let count = 0;
	let characters = 0;
	let r = declared ? 1 : 0;
	readRows(body, delimiter, MOST_COLUMNS, (data) => {
		r++;
		const cells = cellsOf(data);
		count += cells.length;
		characters += cells.reduce((sum, c) => sum + (c[1] as string).length, 0);
		if (count > limits.cells || characters > limits.textCharacters || r > 1_048_576)
			throw new SheetRefusal(
				'too-many-cells',
				`The file holds more than is read at once (${limits.cells.toLocaleString('en')} cells). Keep only the rows with assay values and upload that.`
			);
		if (data.length > MOST_COLUMNS)
			throw new SheetRefusal(
				'too-many-cells',
				`Line ${r} has more than 16 384 columns, the most that a sheet can have. Save the file with another separator, or keep only the columns with assay values, and upload that.`
			);
		if (cells.length === 0) return;
		rows.push({ r, c: cells });
		lastColumn = Math.max(lastColumn, cells[cells.length - 1][0]);
	});
	if (rows.length === 0)
		throw new SheetRefusal(
			'empty',
			'The file holds no cells; a header row and rows of values are expected. Save the sheet again in your spreadsheet program and upload it.'
		);
	const name = sheetName(fileName);
	const sheet = {
		name,
		state: 'visible' as const,
		rows,
		merges: [],
		hiddenRows: [],
		hiddenColumns: [],
		filter: null,
		lastRow: rows[rows.length - 1].r,
		lastColumn
	};
	return {
		fileName,
		kind,
		dateSystem: 1900,
		delimiter: aligned === null ? delimiter : 'spaces',
		styles: [{ format: 'General', kind: 'general' }],
		sheets: [sheet]
	};
}

function cellsOf(data: string[]): GridCell[] {
	const cells: GridCell[] = [];
	for (let i = 0; i < data.length; i++) {
		const text = data[i].trim();
		if (text !== '') cells.push([i + 1, text.slice(0, CELL_TEXT)]);
	}
	return cells;
}

const sheetName = (fileName: string) => fileName.replace(/\.[A-Za-z0-9]{1,5}$/, '').slice(0, 60) || 'Sheet';

/** "sep=;" in the first line names the separator (spreadsheet programs write it). */
function separatorLine(text: string): { body: string; declared: string | null } {
	const match = /^sep=(.)\r?\n/i.exec(text.slice(0, 12));
	return match ? { body: text.slice(match[0].length), declared: match[1] } : { body: text, declared: null };
}

/**
 * The separator that parts most lines into the same number of columns (at least two). A comma that only ever stands between
 * digits is a decimal comma when another separator does as well.
 */
export function separatorOf(text: string): string {
	const lines = text
		.slice(0, 200_000)
		.split(/\r\n|\n|\r/)
		.slice(0, 200)
		.filter((line) => line.trim() !== '');
	let best = ',';
	let bestScore = 0;
	for (const candidate of ['\t', ';', ',', '|']) {
		const score = evenness(lines, candidate);
		if (score > bestScore * (candidate === ',' || candidate === '|' ? 1.05 : 1)) {
			best = candidate;
			bestScore = score;
		}
	}
	return best;
}

/** Columns aligned by two or more spaces, with a tab in their place; null where another separator parts the lines, or nothing does. */
function alignedBySpaces(text: string): string | null {
	const lines = text
		.slice(0, 200_000)
		.split(/\r\n|\n|\r/)
		.slice(0, 200)
		.filter((line) => line.trim() !== '');
	if (lines.length < 3 || ['\t', ';', ',', '|'].some((s) => evenness(lines, s) >= 0.5)) return null;
	const parted = lines.filter((line) => /\S {2,}\S/.test(line)).length;
	if (parted < lines.length * 0.6) return null;
	return text.replace(/^ +| +$/gm, '').replace(/ {2,}/g, '\t');
}

/** Share of lines that have the commonest number of columns, 0 when that is one. */
function evenness(lines: string[], separator: string): number {
	const counts = new Map<number, number>();
	for (const line of lines) {
		const columns = line.replace(/"[^"]*"/g, '').split(separator).length;
		counts.set(columns, (counts.get(columns) ?? 0) + 1);
	}
	let best = 0;
	for (const [columns, n] of counts) if (columns > 1) best = Math.max(best, n / lines.length);
	return best;
}

/** UTF-8 (with or without mark), UTF-16, else Windows-1252, in which every byte is a character. */
function decode(bytes: Uint8Array): { text: string; encoding: string } {
	const wide = utf16Of(bytes.subarray(0, 65_536));
	if (wide) return { text: strip(new TextDecoder(wide).decode(bytes)), encoding: wide };
	try {
		return { text: strip(new TextDecoder('utf-8', { fatal: true }).decode(bytes)), encoding: 'utf-8' };
	} catch {
		return { text: new TextDecoder('windows-1252').decode(bytes), encoding: 'windows-1252' };
	}
}

const strip = (text: string) => (text.charCodeAt(0) === 0xfeff ? text.slice(1) : text);

/** What one table is examined with: sheet, mapping, answers and corrections, and the findings that arise. */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	Answers,
	CellCorrection,
	Finding,
	FindingLevel,
	FindingOption,
	GridWorkbook,
	Mapping,
	Need
} from '$lib/schemas/sheet';
import { take, type Taken } from './answers';
import { type CellReading, readCell } from './cells';
import { displayText, parseAddress, SheetView } from './grid';
import type { Decimal } from './numbers';
import { timeInName } from './name-times';
import { asColumns, Places } from './orientation';
import { joinTime, type TimePart } from './time-parts';
import { readTime, type TimeReading } from './times';

export interface Checks {
	/** % of charge between which a row's mass balance raises no note. */
	massBalanceLow: number;
	massBalanceHigh: number;
	/** K between a logged temperature and the log's median that is noted. */
	temperatureK: number;
}

/** Until a site or a group says otherwise. */
export const CHECKS: Checks = { massBalanceLow: 95, massBalanceHigh: 105, temperatureK: 2 };

export interface FindingSpec {
	rule: string;
	level: FindingLevel;
	cells: string[];
	found: string;
	expected: string;
	message: string;
	options?: FindingOption[];
	/** Part of the id when the first cell does not tell questions apart. */
	key?: string;
}

const MOST_CELLS = 200;

export class Examination {
	readonly view: SheetView;
	/** In columns, whichever way the table lies: see `orientation.ts`. */
	readonly mapping: Mapping;
	readonly places: Places;
	readonly findings: Finding[] = [];
	readonly conversions: string[] = [];
	readonly needs: Need[] = [];
	readonly corrections: CellCorrection[];
	decimal: Decimal | null;
	/** Columns that make up one time, largest unit first; empty where one column does. */
	timeParts: TimePart[] = [];
	/** The time column holds names of samples, with the times in them. */
	timesInNames = false;
	private readonly overlay = new Map<string, string>();
	/** Times read without the mark that they carry; no corrections. */
	private readonly plainTimes = new Map<string, string>();

	constructor(
		readonly workbook: GridWorkbook,
		mapping: Mapping,
		readonly species: SpeciesContent[],
		private readonly answers: Answers = {},
		corrections: CellCorrection[] = [],
		readonly checks: Checks = CHECKS,
		view?: SheetView
	) {
		this.mapping = structuredClone(asColumns(mapping));
		this.places = new Places(mapping.across !== undefined);
		const sheet = workbook.sheets.find((s) => s.name === mapping.sheet);
		this.view = view ?? new SheetView(workbook, sheet ?? EMPTY_SHEET);
		this.decimal = mapping.decimal;
		this.corrections = corrections.filter((c) => c.sheet === mapping.sheet);
		for (const c of this.corrections) this.overlay.set(c.cell, c.corrected);
	}

	get sheet(): string {
		return this.mapping.sheet;
	}

	/** Address on the sheet as received. */
	at(row: number, column: number): string {
		return this.places.at(row, column);
	}

	/** The text as received. */
	shown(row: number, column: number): string {
		return displayText(this.workbook, this.view.cell(row, column)).trim();
	}

	value(row: number, column: number): CellReading {
		return readCell(
			this.workbook,
			this.view.cell(row, column),
			this.decimal,
			this.overlay.get(this.at(row, column))
		);
	}

	/** The time in a cell; in the first of several columns that make up one time, the time of them all. */
	time(row: number, column: number): TimeReading {
		const [main] = this.timeParts;
		if (main?.column !== column) return this.timeCell(row, column);
		return joinTime(
			this.timeParts,
			this.timeParts.map((part) => this.timeCell(row, part.column))
		);
	}

	private timeCell(row: number, column: number): TimeReading {
		const cell = this.view.mergedCell(row, column);
		const at = this.at(row, column);
		const own = this.overlay.get(at) ?? this.plainTimes.get(at);
		const reading = readTime(this.workbook, cell, this.decimal, own);
		if (reading.kind !== 'text' || !this.timesInNames) return reading;
		return timeInName(reading.text, this.decimal) ?? reading;
	}

	/** From here on the time in a cell reads as this text; the cell and the record keep its own. */
	readTimeAs(cell: string, text: string): void {
		this.plainTimes.set(cell, text);
	}

	isCorrected(row: number, column: number): boolean {
		return this.overlay.has(this.at(row, column));
	}

	/** Lays what the person entered over a cell; the cell as received stays. */
	correct(cell: string, corrected: string, reason: string): void {
		const place = parseAddress(cell);
		if (!place) return;
		const { row, column } = this.places.across ? { row: place.column, column: place.row } : place;
		const original = this.shown(row, column).slice(0, 200);
		this.overlay.set(cell, corrected);
		if (this.corrections.some((c) => c.cell === cell && c.corrected === corrected)) return;
		const why =
			reason.trim().length >= 5
				? reason.trim()
				: `Entered while reading the sheet: ${reason.trim() || 'no reason given'}.`;
		this.corrections.push({
			sheet: this.sheet,
			cell,
			original,
			corrected: corrected.slice(0, 200),
			reason: why.slice(0, 500)
		});
	}

	/** A time entered for a row is the whole time: of several columns that make it up, the others then count nothing. */
	correctTime(row: number, column: number, text: string, reason: string): void {
		this.correct(this.at(row, column), text, reason);
		for (const part of this.timeParts.slice(1)) this.correct(this.at(row, part.column), '0', reason);
	}

	/** Records a finding and gives back its answer when there is a complete one. A note is never open. */
	ask(spec: FindingSpec): Taken | null {
		const id = `${spec.rule}:${this.sheet}!${spec.key ?? spec.cells[0] ?? ''}`.slice(0, 200);
		const answer = Object.hasOwn(this.answers, id) ? this.answers[id] : undefined;
		const options = spec.options ?? [];
		const { taken, problem } = take(answer, options, this.decimal);
		this.findings.push({
			id,
			level: spec.level,
			rule: spec.rule,
			sheet: this.sheet,
			cells: spec.cells.slice(0, MOST_CELLS),
			count: spec.cells.length,
			found: spec.found,
			expected: spec.expected,
			message: spec.message,
			options,
			...(answer ? { answer } : {}),
			open: spec.level !== 'note' && taken === null,
			...(problem ? { problem } : {})
		});
		return taken;
	}

	note(spec: Omit<FindingSpec, 'level' | 'expected'> & { expected?: string }): Taken | null {
		return this.ask({ expected: '', ...spec, level: 'note' });
	}

	/** Reopens the finding raised last: its answer could be read but cannot stand. */
	reopen(problem: string): void {
		const last = this.findings.at(-1);
		if (!last) return;
		last.open = last.level !== 'note';
		last.problem = problem;
	}
}

const EMPTY_SHEET = {
	name: '',
	state: 'visible' as const,
	rows: [],
	merges: [],
	hiddenRows: [],
	hiddenColumns: [],
	filter: null,
	lastRow: 0,
	lastColumn: 0
};

/** A number that has to be greater than zero; null, with the finding reopened, when it is not. */
export function positive(ex: Examination, value: number | undefined, what: string): number | null {
	if (value === undefined) return null;
	if (value > 0) return value;
	ex.reopen(`${what} must be greater than zero.`);
	return null;
}

/** What one table is examined with: sheet, mapping, answers and corrections, and the findings that arise. */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	Answer,
	Answers,
	CellCorrection,
	Finding,
	FindingLevel,
	FindingOption,
	GridWorkbook,
	Mapping,
	Need,
	ValueField
} from '$lib/schemas/sheet';
import { type CellReading, readCell } from './cells';
import { address, displayText, parseAddress, SheetView } from './grid';
import { type Decimal, parseNumber } from './numbers';
import { readTime, type TimeReading } from './times';

export interface Checks {
	/** % of charge between which a row's mass balance raises no note. */
	massBalanceLow: number;
	massBalanceHigh: number;
	/** K between a logged temperature and the log's median that is noted. */
	temperatureK: number;
}

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

/** An answer that is complete: its option exists and every value that the option needs is there and readable. */
export interface Taken {
	key: string;
	reason?: string;
	number(field?: string): number;
	text(field?: string): string;
}

const MOST_CELLS = 200;

export class Examination {
	readonly view: SheetView;
	readonly mapping: Mapping;
	readonly findings: Finding[] = [];
	readonly conversions: string[] = [];
	readonly needs: Need[] = [];
	readonly corrections: CellCorrection[];
	decimal: Decimal | null;
	private readonly overlay = new Map<string, string>();

	constructor(
		readonly workbook: GridWorkbook,
		mapping: Mapping,
		readonly species: SpeciesContent[],
		private readonly answers: Answers = {},
		corrections: CellCorrection[] = [],
		readonly checks: Checks = CHECKS,
		view?: SheetView
	) {
		this.mapping = structuredClone(mapping);
		const sheet = workbook.sheets.find((s) => s.name === mapping.sheet);
		this.view = view ?? new SheetView(workbook, sheet ?? EMPTY_SHEET);
		this.decimal = mapping.decimal;
		this.corrections = corrections.filter((c) => c.sheet === mapping.sheet);
		for (const c of this.corrections) this.overlay.set(c.cell, c.corrected);
	}

	get sheet(): string {
		return this.mapping.sheet;
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
			this.overlay.get(address(row, column))
		);
	}

	time(row: number, column: number): TimeReading {
		const cell = this.view.mergedCell(row, column);
		return readTime(this.workbook, cell, this.decimal, this.overlay.get(address(row, column)));
	}

	isCorrected(row: number, column: number): boolean {
		return this.overlay.has(address(row, column));
	}

	/** Lays what the person entered over a cell; the cell as received stays. */
	correct(cell: string, corrected: string, reason: string): void {
		const at = parseAddress(cell);
		if (!at) return;
		const original = this.shown(at.row, at.column).slice(0, 200);
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

function take(
	answer: Answer | undefined,
	options: FindingOption[],
	decimal: Decimal | null
): { taken: Taken | null; problem?: string } {
	if (!answer) return { taken: null };
	const option = options.find((o) => o.key === answer.key);
	if (!option)
		return { taken: null, problem: 'This answer no longer fits what the sheet holds. Choose again.' };
	const values = answer.values ?? {};
	for (const field of option.needsValue ?? []) {
		const problem = fieldProblem(
			field,
			Object.hasOwn(values, field.key) ? values[field.key] : undefined,
			decimal
		);
		if (problem) return { taken: null, problem };
	}
	const number = (field = 'value') => asNumber(values[field], decimal) ?? NaN;
	const text = (field = 'value') => String(values[field] ?? '').trim();
	return { taken: { key: answer.key, reason: answer.reason, number, text } };
}

function fieldProblem(
	field: ValueField,
	value: string | number | undefined,
	decimal: Decimal | null
): string | null {
	if (value === undefined || String(value).trim() === '') return `${field.label} is missing.`;
	if (field.kind === 'number' && asNumber(value, decimal) === null) return `"${value}" is not a number.`;
	if (field.kind === 'choice' && !field.choices?.some((c) => c.key === value))
		return `"${value}" is not among the choices.`;
	return null;
}

/** A typed number: the file's own convention first, else the only reading there is. */
function asNumber(value: string | number | undefined, decimal: Decimal | null): number | null {
	if (typeof value === 'number') return Number.isFinite(value) ? value : null;
	if (value === undefined) return null;
	return parseNumber(value, decimal) ?? parseNumber(value, null);
}

/** Up to six significant digits, for messages. */
export const figure = (n: number): string => String(Number(n.toPrecision(6)));

/** "A1, A2 and 3 more", for messages. */
export function someOf(items: string[], most = 4): string {
	if (items.length <= most) return items.join(', ');
	return `${items.slice(0, most - 1).join(', ')} and ${items.length - most + 1} more`;
}

export const plural = (n: number, one: string, many = one + 's'): string => `${n} ${n === 1 ? one : many}`;

export const ENTER = (label = 'Enter the value'): FindingOption => ({
	key: 'enter',
	label,
	needsValue: [{ key: 'value', label: 'Value', kind: 'text' }]
});

export const MISSING: FindingOption = { key: 'missing', label: 'Leave as missing' };

/** The reason of an answer in brackets, for the record. */
export const because = (reason: string | undefined): string => (reason ? ` (${reason})` : '');

/** A number that has to be greater than zero; null, with the finding reopened, when it is not. */
export function positive(ex: Examination, value: number | undefined, what: string): number | null {
	if (value === undefined) return null;
	if (value > 0) return value;
	ex.reopen(`${what} must be greater than zero.`);
	return null;
}

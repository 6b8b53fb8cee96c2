/**
 * The desk on which a sheet is settled: what was read, what people decided, what is still open. The sheet itself never
 * changes; every decision is kept beside it, can be undone, and is saved by itself.
 */
import { propose, settle } from '$lib/assay';
import { Autosave, type SaveOutcome } from '$lib/client/autosave';
import { setSaveState } from '$lib/client/save-state.svelte';
import { change, redo, startHistory, undo, type History } from '$lib/client/undo';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type {
	Answer,
	Block,
	CellCorrection,
	ColumnMapping,
	Conditions,
	Finding,
	GridWorkbook,
	PeakMapping,
	Proposal,
	SavedMapping,
	Settlement,
	TableProposal
} from '$lib/schemas/sheet';
import type { SheetWork, TableWork } from '$lib/schemas/sheet-work';
import { DrawnTables } from './drawn';
import { litCells } from './lit';
import { stamp } from './stamp';

export interface DeskInput {
	sheetId: string;
	version: number;
	workbook: GridWorkbook;
	work: SheetWork;
	species: SpeciesContent[];
	saved: SavedMapping[];
	/** Keys of the tables that are runs already. */
	confirmed: string[];
	canWrite: boolean;
	/** Name that a correction carries until the service has signed it. */
	me: string;
	/** Told after each save; what else shows the count of open questions can ask for it anew. */
	onsaved?: () => void;
}

interface Conflict {
	version: number;
	work: SheetWork;
}

export class Desk {
	readonly proposal: Proposal;
	key = $state('');
	conflict = $state.raw<Conflict | null>(null);
	private history: History<SheetWork> = $state.raw(startHistory<SheetWork>({ tables: {} }));
	private readonly drawn: DrawnTables;
	private readonly autosave: Autosave<SheetWork, Conflict>;

	constructor(private readonly input: DeskInput) {
		this.proposal = propose(input.workbook, input.species, { saved: input.saved });
		this.drawn = new DrawnTables(input.workbook, input.species, input.saved);
		this.history = startHistory(input.work);
		this.key =
			this.proposal.tables.find((t) => !input.confirmed.includes(t.id))?.id ?? this.keys[0] ?? '';
		this.autosave = new Autosave<SheetWork, Conflict>({
			version: input.version,
			save: (work, version) => this.send(work, version),
			onstatus: setSaveState,
			onconflict: (theirs) => (this.conflict = theirs)
		});
	}

	get work(): SheetWork {
		return this.history.present;
	}
	get keys(): string[] {
		const found = this.proposal.tables.map((t) => t.id);
		return [...found, ...Object.keys(this.work.tables).filter((key) => !found.includes(key))];
	}
	get canUndo(): boolean {
		return this.history.past.length > 0;
	}
	get canRedo(): boolean {
		return this.history.future.length > 0;
	}
	get version(): number {
		return this.autosave.version;
	}

	/** The proposal of a table; one that a person drew is proposed from its own rows. */
	tableOf(key: string): TableProposal | null {
		const found = this.proposal.tables.find((t) => t.id === key);
		if (found) return found;
		const own = this.work.tables[key];
		if (!own) return null;
		const { sheet, block, headerRows } = own.mapping;
		return this.drawn.propose({ key, sheet, block, headerRows });
	}

	workOn(key: string): TableWork | null {
		const own = this.work.tables[key];
		if (own) return own;
		const table = this.proposal.tables.find((t) => t.id === key);
		return table ? { mapping: table.mapping, answers: {}, corrections: [], name: '' } : null;
	}

	readonly table = $derived.by(() => this.tableOf(this.key));
	readonly own = $derived.by(() => this.workOn(this.key));
	readonly settlement = $derived.by((): Settlement | null => {
		const { workbook, species } = this.input;
		const { own } = this;
		if (!own) return null;
		const { mapping, answers, corrections } = own;
		return settle({ workbook, species, mapping, answers, corrections });
	});
	/** Level of the gravest finding that lights a cell of the present table, and whether it waits for an answer. */
	readonly lit = $derived.by(() => litCells(this.settlement?.findings ?? []));

	private change(next: Partial<TableWork>, mergeKey: string | null = null): void {
		const { own, key } = this;
		if (!own || !this.input.canWrite) return;
		const tables = { ...this.work.tables, [key]: { ...own, ...next } };
		this.take(change(this.history, { tables }, mergeKey && `${key} ${mergeKey}`));
	}

	private take(history: History<SheetWork>): void {
		this.history = history;
		this.autosave.queue(history.present);
	}

	undo(): void {
		this.take(undo(this.history));
		if (!this.own) this.key = this.keys[0] ?? '';
	}
	redo(): void {
		this.take(redo(this.history));
	}

	answer(finding: Finding, answer: Answer | null): void {
		if (!this.own) return;
		const { [finding.id]: _before, ...others } = this.own.answers;
		this.change({ answers: answer ? { ...others, [finding.id]: answer } : others }, `answer ${finding.id}`);
	}

	setColumn(column: number, next: Partial<ColumnMapping>): void {
		if (!this.own) return;
		const columns = this.own.mapping.columns.map((c) => (c.column === column ? { ...c, ...next } : c));
		this.change({ mapping: { ...this.own.mapping, columns } }, `column ${column}`);
	}

	setPeak(peak: string, next: Partial<PeakMapping>): void {
		if (!this.own) return;
		const peaks = (this.own.mapping.peaks ?? []).map((p) => (p.peak === peak ? { ...p, ...next } : p));
		this.change({ mapping: { ...this.own.mapping, peaks } }, `peak ${peak}`);
	}

	setConditions(next: Partial<Conditions>): void {
		if (!this.own) return;
		const before = this.own.mapping.conditions ?? { temperature: null, initial: {}, excess: {} };
		this.change({ mapping: { ...this.own.mapping, conditions: { ...before, ...next } } }, 'conditions');
	}

	setName(name: string): void {
		this.change({ name }, 'name');
	}

	/** Other rows count as the data; columns and answers stay. */
	setRows(firstRow: number, lastRow: number): void {
		if (!this.own) return;
		const { mapping } = this.own;
		const headerRows = mapping.headerRows.filter((r) => r < firstRow);
		this.change({ mapping: { ...mapping, headerRows, block: { ...mapping.block, firstRow, lastRow } } });
	}

	/** Another block counts as the data; columns that are new to it are proposed like any other. */
	setBlock(block: Block): void {
		if (!this.own) return;
		const { mapping } = this.own;
		const headerRows = mapping.headerRows.filter((r) => r < block.firstRow);
		const kept = mapping.columns.filter((c) => c.column >= block.firstColumn && c.column <= block.lastColumn);
		const proposed = this.drawn.columnsOf({ key: 'edge', sheet: mapping.sheet, block, headerRows });
		const added = proposed.filter((c) => !kept.some((k) => k.column === c.column));
		const columns = [...kept, ...added].sort((a, b) => a.column - b.column);
		this.change({ mapping: { ...mapping, headerRows, block, columns } }, 'block');
	}

	correct(cell: string, original: string, corrected: string, reason: string): void {
		const sheet = this.own?.mapping.sheet ?? '';
		const [by, at] = [this.input.me, stamp()];
		this.change({ corrections: [...this.without(cell), { sheet, cell, original, corrected, reason, by, at }] });
	}
	uncorrect(cell: string): void {
		this.change({ corrections: this.without(cell) });
	}
	private without(cell: string): CellCorrection[] {
		return (this.own?.corrections ?? []).filter((c) => c.cell !== cell);
	}

	/** Rows that the person said belong to a run of their own, or rows marked by hand where none was found. */
	addTable(sheet: string, block: Block): string | null {
		if (!this.input.canWrite) return null;
		const near = Object.values(this.work.tables).find((t) => t.mapping.sheet === sheet);
		const headerRows = (this.own?.mapping ?? near?.mapping)?.headerRows ?? null;
		const key = nextKey(this.keys);
		const table = this.drawn.propose({ key, sheet, block, headerRows });
		if (!table) return null;
		const own: TableWork = { mapping: table.mapping, answers: {}, corrections: [], name: '' };
		this.take(change(this.history, { tables: { ...this.work.tables, [key]: own } }));
		this.key = key;
		return key;
	}

	/** Saves what waits; false when it could not be. */
	async settleSaves(): Promise<boolean> {
		await this.autosave.flush();
		return !this.autosave.dirty && this.conflict === null;
	}

	keepMine(): void {
		if (!this.conflict) return;
		this.autosave.resume(this.conflict.version);
		this.conflict = null;
		this.autosave.queue(this.work);
	}
	takeTheirs(): void {
		if (!this.conflict) return;
		const { version, work } = this.conflict;
		this.autosave.discard();
		this.autosave.resume(version);
		this.conflict = null;
		this.history = change(this.history, work);
		setSaveState('idle');
	}

	private async send(work: SheetWork, version: number): Promise<SaveOutcome<Conflict>> {
		const response = await fetch(`/api/v1/sheets/${this.input.sheetId}`, {
			method: 'PATCH',
			headers: { 'content-type': 'application/json', 'if-match': `"${version}"` },
			body: JSON.stringify({ work })
		});
		const body = (await response.json()) as { version: number; code?: string; detail?: string; data?: Conflict };
		if (response.ok) {
			this.input.onsaved?.();
			return { kind: 'saved', version: body.version };
		}
		if (body.code === 'version-changed' && body.data) return { kind: 'conflict', theirs: body.data };
		const again = response.status >= 500 || response.status === 429;
		return { kind: 'failed', message: body.detail ?? 'the service refused it', again };
	}
}

function nextKey(keys: string[]): string {
	let n = keys.length + 1;
	while (keys.includes(`t${n}`)) n++;
	return `t${n}`;
}

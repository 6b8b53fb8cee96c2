/**
 * The desk on which a sheet is settled: what people decided about each of its tables. The sheet itself never changes; every
 * decision is kept beside it, can be undone, and is saved by itself. What the reader says to it is in `reading.svelte.ts`.
 */
import { untrack } from 'svelte';
import { Autosave } from '$lib/client/autosave';
import { startReader, type Reader } from '$lib/client/reader/reader';
import type { DrawnPlace, Opening } from '$lib/client/reader/tasks';
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
	Mapping,
	PeakMapping,
	SavedMapping,
	TableProposal
} from '$lib/schemas/sheet';
import type { SheetWork, TableWork } from '$lib/schemas/sheet-work';
import { litCells } from './lit';
import { headerRowsOf, withAddedSeries, withBlock, withSeries } from './mapped-series';
import { Reading } from './reading.svelte';
import { sendWork, type WorkConflict } from './save-work';
import { stamp } from './stamp';
import { withAnswers } from './finding-answer';

export interface DeskInput {
	sheetId: string;
	version: number;
	workbookJson: string;
	work: SheetWork;
	species: SpeciesContent[];
	saved: SavedMapping[];
	/** Limits of the site or the group. */
	checks: Opening['checks'];
	/** Keys of the tables that are runs already. */
	confirmed: string[];
	canWrite: boolean;
	/** Name that a correction carries until the service has signed it. */
	me: string;
	/** Told after each save; what else shows the count of open questions can ask for it anew. */
	onsaved?: () => void;
}

const placeOf = (key: string, { sheet, block, ...mapping }: Mapping): DrawnPlace => ({
	key,
	sheet,
	block,
	headerRows: headerRowsOf({ sheet, block, ...mapping })
});

export class Desk {
	key = $state('');
	conflict = $state.raw<WorkConflict | null>(null);
	readonly reading: Reading;
	private history: History<SheetWork> = $state.raw(startHistory<SheetWork>({ tables: {} }));
	private readonly autosave: Autosave<SheetWork, WorkConflict>;

	/** Within a component: what is decided is settled as long as that component lives. */
	constructor(
		private readonly input: DeskInput,
		reader: Reader = startReader()
	) {
		const { workbookJson, species, saved, checks, confirmed } = input;
		this.history = startHistory(input.work);
		this.reading = new Reading(reader, { workbookJson, species, saved, checks }, ({ tables }) => {
			this.key = tables.find((t) => !confirmed.includes(t.id))?.id ?? this.keys[0] ?? '';
		});
		this.autosave = new Autosave<SheetWork, WorkConflict>({
			version: input.version,
			save: async (work, version) => {
				const outcome = await sendWork(input.sheetId, work, version);
				if (outcome.kind === 'saved') input.onsaved?.();
				return outcome;
			},
			onstatus: setSaveState,
			onconflict: (theirs) => (this.conflict = theirs)
		});
		$effect(() => this.keepUp());
	}

	/** Whatever was decided is looked through anew; tables that were drawn earlier get their proposal. */
	private keepUp(): void {
		const { own, key, keys, proposal } = this;
		if (!proposal) return;
		untrack(() => {
			if (own) this.reading.settle(key, own);
			for (const one of keys)
				if (!proposal.tables.some((t) => t.id === one))
					this.reading.drawOnce(placeOf(one, this.work.tables[one].mapping));
		});
	}

	get proposal() {
		return this.reading.proposal;
	}
	get work(): SheetWork {
		return this.history.present;
	}
	get keys(): string[] {
		if (!this.proposal) return [];
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
		return this.proposal?.tables.find((t) => t.id === key) ?? this.reading.drawnTable(key);
	}

	workOn(key: string): TableWork | null {
		const own = this.work.tables[key];
		if (own) return own;
		const table = this.proposal?.tables.find((t) => t.id === key);
		return table ? { mapping: table.mapping, answers: {}, corrections: [], name: '' } : null;
	}

	readonly table = $derived.by(() => this.tableOf(this.key));
	readonly own = $derived.by(() => this.workOn(this.key));
	readonly settlement = $derived.by(() => this.reading.settlementOf(this.key));
	/** Findings as last settled, with the answers as they are given now. */
	readonly findings = $derived.by(() => withAnswers(this.settlement?.findings ?? [], this.own?.answers ?? {}));
	/** Level of the gravest finding that lights a cell of the present table, and whether it waits for an answer. */
	readonly lit = $derived.by(() => litCells(this.settlement?.findings ?? []));

	private change(next: Partial<TableWork>, mergeKey: string | null = null): void {
		const { own, key } = this;
		if (!own || !this.input.canWrite) return;
		const tables = { ...this.work.tables, [key]: { ...own, ...next } };
		this.take(change(this.history, { tables }, mergeKey && `${key} ${mergeKey}`));
	}

	private map(next: (mapping: Mapping) => Mapping, mergeKey: string | null = null): void {
		if (!this.own) return;
		const mapping = next(this.own.mapping);
		if (mapping !== this.own.mapping) this.change({ mapping }, mergeKey);
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

	setSeries(place: number, next: Partial<ColumnMapping>): void {
		this.map((mapping) => withSeries(mapping, place, next), `series ${place}`);
	}

	setPeak(peak: string, next: Partial<PeakMapping>): void {
		const peaks = (mapping: Mapping) =>
			(mapping.peaks ?? []).map((p) => (p.peak === peak ? { ...p, ...next } : p));
		this.map((mapping) => ({ ...mapping, peaks: peaks(mapping) }), `peak ${peak}`);
	}

	setConditions(next: Partial<Conditions>): void {
		const before = this.own?.mapping.conditions ?? { temperature: null, initial: {}, excess: {} };
		this.map((mapping) => ({ ...mapping, conditions: { ...before, ...next } }), 'conditions');
	}

	setName(name: string): void {
		this.change({ name }, 'name');
	}

	/** Another block counts as the data, at once; series that are new to it follow as the reader proposes them. */
	setBlock(block: Block): void {
		const { key } = this;
		this.map((mapping) => withBlock(mapping, block), 'block');
		if (!this.own) return;
		const place = placeOf(key, this.own.mapping);
		void this.reading.propose({ ...place, key: 'edge' }).then((table) => {
			// Meanwhile the block may have been moved on, or another table been taken up.
			if (table && this.key === key && this.own?.mapping.block === place.block)
				this.map((mapping) => withAddedSeries(mapping, table.mapping), 'block');
		});
	}

	setRows(firstRow: number, lastRow: number): void {
		if (this.own) this.setBlock({ ...this.own.mapping.block, firstRow, lastRow });
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
	async addTable(sheet: string, block: Block): Promise<void> {
		if (!this.input.canWrite) return;
		const near = Object.values(this.work.tables).find((t) => t.mapping.sheet === sheet);
		const like = (this.own ?? near)?.mapping;
		const key = nextKey(this.keys);
		const table = await this.reading.draw({ key, sheet, block, headerRows: like ? headerRowsOf(like) : null });
		if (!table) return;
		const own: TableWork = { mapping: table.mapping, answers: {}, corrections: [], name: '' };
		this.take(change(this.history, { tables: { ...this.work.tables, [key]: own } }));
		this.key = key;
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
}

function nextKey(keys: string[]): string {
	let n = keys.length + 1;
	while (keys.includes(`t${n}`)) n++;
	return `t${n}`;
}

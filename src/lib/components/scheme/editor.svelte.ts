import { Autosave, type SaveOutcome } from '$lib/client/autosave';
import { setSaveState } from '$lib/client/save-state.svelte';
import { change, redo, startHistory, undo, type History } from '$lib/client/undo';
import type { SchemeContent } from '$lib/schemas/scheme';

export interface SchemeRecord {
	id: string;
	name: string;
	version: number;
	number: number;
	content: SchemeContent;
}

/** The other side of a conflict, as the service sends it. */
export interface Theirs {
	version: number;
	name: string;
	number: number;
	content: SchemeContent;
	savedBy: string;
	savedAt: string;
}

interface Draft {
	name: string;
	content: SchemeContent;
}

async function patch(
	id: string,
	draft: Draft,
	version: number
): Promise<SaveOutcome<Theirs> & { number?: number }> {
	const response = await fetch(`/api/v1/schemes/${id}`, {
		method: 'PATCH',
		headers: { 'content-type': 'application/json', 'if-match': `"${version}"` },
		body: JSON.stringify({ name: draft.name, ...draft.content })
	});
	const body = (await response.json().catch(() => null)) as Record<string, unknown> | null;
	if (response.ok && body)
		return { kind: 'saved', version: body.version as number, number: body.number as number };
	if (response.status === 409 && body?.code === 'version-changed')
		return { kind: 'conflict', theirs: body.data as Theirs };
	const again = response.status >= 500 || response.status === 429 || response.status === 401;
	const message =
		response.status === 401
			? 'you were signed out; sign in again in another tab, and this is saved'
			: ((body?.detail as string | undefined) ?? 'the service did not take it');
	return { kind: 'failed', message, again };
}

/** One scheme in work: its draft with undo and redo, saved by itself. */
export class SchemeEditor {
	private history = $state.raw<History<Draft>>(startHistory({ name: '', content: null as never }));
	number = $state(0);
	theirs = $state.raw<Theirs | null>(null);
	/** Told when a species gets another symbol, so that what the page keeps by symbol can follow. */
	onrename: ((from: string, to: string) => void) | null = null;
	readonly id: string;
	readonly canWrite: boolean;
	private readonly autosave: Autosave<Draft, Theirs>;

	constructor(
		record: SchemeRecord,
		canWrite: boolean,
		private readonly onsaved: () => void
	) {
		this.id = record.id;
		this.canWrite = canWrite;
		this.number = record.number;
		this.history = startHistory({ name: record.name, content: record.content });
		this.autosave = new Autosave<Draft, Theirs>({
			version: record.version,
			save: async (draft, version) => {
				const outcome = await patch(this.id, draft, version);
				if (outcome.number !== undefined) this.number = outcome.number;
				return outcome;
			},
			onstatus: (status, message) => {
				setSaveState(status, message);
				if (status === 'saved') this.onsaved();
			},
			onconflict: (theirs) => (this.theirs = theirs)
		});
	}

	get content(): SchemeContent {
		return this.history.present.content;
	}
	get name(): string {
		return this.history.present.name;
	}
	get canUndo(): boolean {
		return this.canWrite && this.history.past.length > 0;
	}
	get canRedo(): boolean {
		return this.canWrite && this.history.future.length > 0;
	}
	get dirty(): boolean {
		return this.autosave.dirty;
	}

	/** Takes a change; those with one key that follow closely are undone together. */
	apply(content: SchemeContent, key: string | null = null): void {
		if (!this.canWrite || content === this.content) return;
		this.take(change(this.history, { ...this.history.present, content }, key));
	}
	rename(name: string): void {
		if (!this.canWrite || !name.trim() || name === this.name) return;
		this.take(change(this.history, { ...this.history.present, name: name.trim() }));
	}
	undo(): void {
		if (this.canUndo) this.take(undo(this.history));
	}
	redo(): void {
		if (this.canRedo) this.take(redo(this.history));
	}
	flush(): Promise<void> {
		return this.autosave.flush();
	}

	keepMine(): void {
		if (!this.theirs) return;
		this.autosave.resume(this.theirs.version);
		this.theirs = null;
		this.autosave.queue(this.history.present);
	}
	/** Shows theirs; mine is one undo away. */
	takeTheirs(): void {
		if (!this.theirs) return;
		const { version, name, number, content } = this.theirs;
		this.autosave.discard();
		this.autosave.resume(version);
		this.history = change(this.history, { name, content });
		this.number = number;
		this.theirs = null;
		setSaveState('saved');
		this.onsaved();
	}

	private take(next: History<Draft>): void {
		if (next === this.history) return;
		this.history = next;
		this.autosave.queue(next.present);
	}
}

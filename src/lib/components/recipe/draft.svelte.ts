import { invalidate } from '$app/navigation';
import { Autosave, type SaveOutcome } from '$lib/client/autosave';
import { setSaveState } from '$lib/client/save-state.svelte';
import { change, redo, startHistory, undo, type History } from '$lib/client/undo';
import type { RecipeContent } from '$lib/schemas/recipe';
import type { RecipeView } from '$lib/server/recipes/read-recipe';

interface Theirs {
	content: RecipeContent;
	version: number;
	contentHash: string;
}

/** A draft in the page: undo and redo over every change, saved by itself, a conflict shown and never overwritten. */
export class RecipeDraft {
	history = $state.raw<History<RecipeContent>>(startHistory<RecipeContent>(null as never));
	theirs = $state.raw<Theirs | null>(null);
	private readonly autosave: Autosave<RecipeContent, Theirs>;

	constructor(
		private readonly recipeId: string,
		private readonly number: number,
		start: { content: RecipeContent; version: number }
	) {
		this.history = startHistory(start.content);
		this.autosave = new Autosave<RecipeContent, Theirs>({
			version: start.version,
			save: (content, version) => this.save(content, version),
			onstatus: (status, message) => {
				setSaveState(status, message);
				// What the server works out from the content (cautions, difference) follows each save.
				if (status === 'saved') void invalidate('recipe:view');
			},
			onconflict: (theirs) => (this.theirs = theirs)
		});
	}

	get content(): RecipeContent {
		return this.history.present;
	}
	get dirty(): boolean {
		return this.autosave.dirty;
	}

	readonly edit = (next: RecipeContent, key?: string): void =>
		this.go(change(this.history, next, key ?? null));
	readonly undo = (): void => this.go(undo(this.history));
	readonly redo = (): void => this.go(redo(this.history));
	flush(): Promise<void> {
		return this.autosave.flush();
	}

	keepMine(): void {
		if (!this.theirs) return;
		this.autosave.resume(this.theirs.version);
		this.theirs = null;
		this.autosave.queue(this.content);
	}
	takeTheirs(): void {
		if (!this.theirs) return;
		this.autosave.discard();
		this.autosave.resume(this.theirs.version);
		this.history = change(this.history, this.theirs.content);
		this.theirs = null;
		setSaveState('saved');
	}

	private go(next: History<RecipeContent>): void {
		if (next === this.history) return;
		this.history = next;
		this.autosave.queue(next.present);
	}

	private async save(content: RecipeContent, version: number): Promise<SaveOutcome<Theirs>> {
		const address = `/api/v1/recipes/${this.recipeId}`;
		const response = await fetch(address, {
			method: 'PATCH',
			headers: { 'content-type': 'application/json', 'if-match': `"${version}"` },
			body: JSON.stringify({ number: this.number, content })
		});
		if (response.ok)
			return { kind: 'saved', version: ((await response.json()) as { version: number }).version };
		const problem = (await response.json()) as { code?: string; detail?: string };
		if (problem.code === 'version-changed') {
			const theirs = (await (await fetch(`${address}?version=${this.number}`)).json()) as RecipeView;
			const { content: newer, version: at, contentHash } = theirs.shown;
			return { kind: 'conflict', theirs: { content: newer, version: at, contentHash } };
		}
		const message =
			response.status === 401 ? 'your session has ended, sign in in another tab' : problem.detail;
		return {
			kind: 'failed',
			message: message ?? 'the service refused it',
			again: response.status === 401 || response.status >= 500
		};
	}
}

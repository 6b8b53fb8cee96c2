/** The quantities that a person looks at on a result page: of one run at a time, the usual ones and those added by hand. */
import { SvelteMap } from 'svelte/reactivity';
import type { AnsweredDecision, AskedDecision, FitAnswers } from '$lib/schemas/fit-analysis';
import { askFit } from './ask';

type Decisions = FitAnswers['decisions'];

export class DecisionDesk {
	/** Id of the run within the request. */
	run = $state('');
	busy = $state(false);
	problem = $state('');
	private readonly usual = new SvelteMap<string, Decisions>();
	private readonly added = new SvelteMap<string, AnsweredDecision[]>();
	private controller: AbortController | null = null;

	constructor(
		private readonly fitUrl: () => string,
		run: string
	) {
		this.run = run;
	}

	get shown(): Decisions | undefined {
		return this.usual.get(this.run);
	}

	get own(): AnsweredDecision[] {
		return this.added.get(this.run) ?? [];
	}

	/** Of another run, worked out the first time that it is looked at. */
	async open(run: string): Promise<void> {
		this.run = run;
		this.problem = '';
		if (this.usual.has(run)) return;
		const found = await this.ask();
		if (found) this.usual.set(run, found);
	}

	async add(question: AskedDecision): Promise<void> {
		const run = this.run;
		const found = await this.ask([question]);
		if (found) this.added.set(run, [...(this.added.get(run) ?? []), ...found.answers]);
	}

	remove(place: number): void {
		this.added.set(this.run, this.own.toSpliced(place, 1));
	}

	stop = (): void => this.controller?.abort();

	private async ask(questions?: AskedDecision[]): Promise<Decisions | null> {
		this.stop();
		const mine = (this.controller = new AbortController());
		this.busy = true;
		this.problem = '';
		try {
			return await askFit<'decisions'>(
				this.fitUrl(),
				{ kind: 'decisions', run: this.run, profiles: true, ...(questions ? { questions } : {}) },
				mine.signal
			);
		} catch (caught) {
			if (!mine.signal.aborted) this.problem = caught instanceof Error ? caught.message : String(caught);
			return null;
		} finally {
			if (this.controller === mine) this.busy = false;
		}
	}
}

/**
 * The newest of many asks, one at a time: what was overtaken while it waited is never begun, and an answer that was overtaken
 * while it was worked out is dropped.
 */
export interface NewestOptions<Ask, Answer> {
	run: (ask: Ask) => Promise<Answer>;
	onanswer: (ask: Ask, answer: Answer) => void;
	onfailed: (ask: Ask, error: unknown) => void;
}

export class Newest<Ask, Answer> {
	private running = false;
	private next: { ask: Ask } | null = null;
	private waiters: (() => void)[] = [];

	constructor(private readonly options: NewestOptions<Ask, Answer>) {}

	/** True while the newest ask has no answer yet. */
	get busy(): boolean {
		return this.running;
	}

	put(ask: Ask): void {
		this.next = { ask };
		if (!this.running) void this.work();
	}

	/** When the newest ask has been answered. */
	async done(): Promise<void> {
		if (this.running) await new Promise<void>((go) => this.waiters.push(go));
	}

	private async work(): Promise<void> {
		this.running = true;
		while (this.next) {
			const { ask } = this.next;
			this.next = null;
			await this.answer(ask);
		}
		this.running = false;
		this.waiters.splice(0).forEach((go) => go());
	}

	private async answer(ask: Ask): Promise<void> {
		try {
			const answer = await this.options.run(ask);
			if (!this.next) this.options.onanswer(ask, answer);
		} catch (error) {
			if (!this.next) this.options.onfailed(ask, error);
		}
	}
}

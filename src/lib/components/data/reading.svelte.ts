/**
 * What the reader says of an open sheet: the tables it found, those that were drawn, and how each stands. Worked out beside the
 * page; the last answer stays in sight until the next one is there.
 */
import { tick } from 'svelte';
import { Newest } from '$lib/client/reader/newest';
import type { Reader } from '$lib/client/reader/reader';
import type { Decided, DrawnPlace, Opening, Settled } from '$lib/client/reader/tasks';
import type { Proposal, TableProposal } from '$lib/schemas/sheet';

interface Ask {
	key: string;
	decided: Decided;
}

const same = (a: Decided, b: Decided): boolean =>
	a.mapping === b.mapping && a.answers === b.answers && a.corrections === b.corrections;

export class Reading {
	/** Null until the reader has looked through the sheet. */
	proposal = $state.raw<Proposal | null>(null);
	/** Why there is no answer, in words for the person. */
	failed = $state('');
	/** Whether what is shown is older than what was decided last. */
	waiting = $state(false);
	private drawn = $state.raw<Record<string, TableProposal>>({});
	private settled = $state.raw<Record<string, Settled>>({});
	private asked: readonly string[] = [];
	private last: Ask | null = null;
	private readonly newest: Newest<Ask, Settled>;

	constructor(
		private readonly reader: Reader,
		opening: Opening,
		onproposal: (proposal: Proposal) => void
	) {
		this.newest = new Newest({
			run: ({ decided }) => reader.ask('settle', decided),
			onanswer: ({ key }, settled) => {
				this.settled = { ...this.settled, [key]: settled };
				this.waiting = false;
				this.failed = '';
			},
			onfailed: () => this.fail()
		});
		reader.ask('open', opening).then(
			(proposal) => {
				this.proposal = proposal;
				onproposal(proposal);
			},
			() => this.fail()
		);
	}

	settlementOf(key: string): Settled | null {
		return this.settled[key] ?? null;
	}

	/** Settles a table as it stands now; nothing is asked twice. */
	settle(key: string, { mapping, answers, corrections }: Decided): void {
		const decided = { mapping, answers, corrections };
		if (this.last?.key === key && same(this.last.decided, decided)) return;
		this.last = { key, decided };
		this.waiting = true;
		this.newest.put(this.last);
	}

	/** When what is shown belongs to what was decided last. */
	async upToDate(): Promise<void> {
		// What was just decided is asked for once the page has taken it in.
		await tick();
		await this.newest.done();
		await tick();
	}

	drawnTable(key: string): TableProposal | null {
		return this.drawn[key] ?? null;
	}

	/** The proposal of a table that a person marked, made once. */
	async draw(place: DrawnPlace): Promise<TableProposal | null> {
		this.asked = [...this.asked, place.key];
		const table = await this.propose(place);
		if (table) this.drawn = { ...this.drawn, [place.key]: table };
		return table;
	}

	drawOnce(place: DrawnPlace): void {
		if (!this.asked.includes(place.key)) void this.draw(place);
	}

	/** A block as the reader would propose it; nothing is kept. */
	async propose(place: DrawnPlace): Promise<TableProposal | null> {
		try {
			return await this.reader.ask('draw', place);
		} catch {
			this.fail();
			return null;
		}
	}

	private fail(): void {
		this.waiting = false;
		this.failed =
			'The table could not be looked through anew; what is shown is older than your last answer. Your answers are kept: load the page again, and tell your admin if it stays so.';
	}

	close(): void {
		this.reader.close();
	}
}

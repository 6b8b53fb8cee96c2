/**
 * Whose turn it is: people take turns, so that ten fits of one do not stand before the first of another.
 *
 * Next is the oldest waiting job of the person with the fewest running; among equals of the one who was served longest ago.
 * Pure: the queue asks it for the next job, the pages for the place of one that waits.
 */
export interface WaitingJob {
	id: string;
	/** Who asked for it. */
	by: string;
}

/** What a person has had so far. */
export interface Served {
	running: number;
	/** When a job of theirs was last begun, any number that grows with time; −Infinity for never. */
	last: number;
}

const NOTHING: Served = { running: 0, last: -Infinity };

/** Place in `waiting` (ordered by age) of the job whose turn it is; −1 where nothing waits. */
function next(waiting: readonly WaitingJob[], served: ReadonlyMap<string, Served>): number {
	let best = -1;
	waiting.forEach((job, place) => {
		if (best < 0) return void (best = place);
		const a = served.get(job.by) ?? NOTHING;
		const b = served.get(waiting[best].by) ?? NOTHING;
		if (a.running < b.running || (a.running === b.running && a.last < b.last)) best = place;
	});
	return best;
}

/** The waiting jobs in the order in which they will be begun if nobody asks for more and each ends before the next begins. */
export function inTurn(waiting: readonly WaitingJob[], served: ReadonlyMap<string, Served>): string[] {
	const left = [...waiting];
	const now = new Map(served);
	let clock = Math.max(0, ...[...served.values()].map((s) => s.last).filter(Number.isFinite));
	const order: string[] = [];
	while (left.length) {
		const [job] = left.splice(next(left, now), 1);
		order.push(job.id);
		now.set(job.by, { running: now.get(job.by)?.running ?? 0, last: ++clock });
	}
	return order;
}

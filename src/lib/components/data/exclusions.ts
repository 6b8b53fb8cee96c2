/** What is left out of a run, found by row and channel without going through the whole list each time. */
import type { ExclusionContent, RunContent } from '$lib/schemas/run';

export class Exclusions {
	private readonly rows = new Map<number, ExclusionContent>();
	private readonly values = new Map<string, ExclusionContent>();

	constructor(content: Pick<RunContent, 'exclusions'>) {
		for (const one of content.exclusions ?? []) {
			if (one.channel === null) this.rows.set(one.index, one);
			else this.values.set(`${one.index} ${one.channel}`, one);
		}
	}

	/** Why a whole row is left out; null where it is used. */
	ofRow(index: number): ExclusionContent | null {
		return this.rows.get(index) ?? null;
	}

	/** Why a value is left out, by itself or with its row. */
	of(index: number, channel: string): ExclusionContent | null {
		return this.values.get(`${index} ${channel}`) ?? this.ofRow(index);
	}
}

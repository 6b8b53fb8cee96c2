import type { ExclusionContent } from '$lib/schemas/run';

/** The value or row that the person is about to leave out or take back. */
export interface PointChoice {
	index: number;
	/** Null: the whole row. */
	channel: string | null;
	/** "B at 0.5 h". */
	words: string;
	excluded: ExclusionContent | null;
}

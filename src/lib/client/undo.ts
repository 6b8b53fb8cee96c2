/** Undo and redo over immutable values. */
export interface History<T> {
	readonly past: readonly T[];
	readonly present: T;
	readonly future: readonly T[];
	/** Changes with the same key that follow each other closely count as one (a slider being dragged). */
	readonly key: string | null;
	readonly at: number;
}

const LONGEST = 200;
const MERGE_MS = 1200;

export const startHistory = <T>(present: T): History<T> => ({
	past: [],
	present,
	future: [],
	key: null,
	at: 0
});

export function change<T>(
	history: History<T>,
	next: T,
	key: string | null = null,
	now = Date.now()
): History<T> {
	if (next === history.present) return history;
	const merges = key !== null && key === history.key && now - history.at < MERGE_MS;
	const past = merges ? history.past : [...history.past, history.present].slice(-LONGEST);
	return { past, present: next, future: [], key, at: now };
}

export function undo<T>(history: History<T>): History<T> {
	const before = history.past.at(-1);
	if (history.past.length === 0) return history;
	return {
		past: history.past.slice(0, -1),
		present: before as T,
		future: [history.present, ...history.future],
		key: null,
		at: 0
	};
}

export function redo<T>(history: History<T>): History<T> {
	if (history.future.length === 0) return history;
	const [next, ...future] = history.future;
	return { past: [...history.past, history.present], present: next, future, key: null, at: 0 };
}

/** The part of a long list of findings that is drawn: a sheet of twenty thousand doubtful cells must stay as quick as one of ten. */
export interface Window {
	from: number;
	to: number;
}

export const WINDOW = 80;
const BEFORE = 20;

/** Kept within the list, and never empty while the list is not. */
export function clampWindow({ from, to }: Window, length: number): Window {
	const first = Math.max(0, Math.min(from, length - Math.min(WINDOW, length)));
	return { from: first, to: Math.min(length, Math.max(to, first + WINDOW)) };
}

/** The window that shows this place; the same one where it does already. */
export function windowAt(place: number, now: Window, length: number): Window {
	if (place >= now.from && place < now.to) return now;
	const from = Math.max(0, place - BEFORE);
	return clampWindow({ from, to: from + WINDOW }, length);
}

export const earlier = ({ from, to }: Window): Window => ({ from: Math.max(0, from - WINDOW), to });
export const further = ({ from, to }: Window): Window => ({ from, to: to + WINDOW });

import type { Finding } from '$lib/schemas/sheet';

/** How a cell is lit: by the gravest finding that concerns it, and whether that waits for an answer. */
export interface Lit {
	level: Finding['level'];
	open: boolean;
	id: string;
}

const GRAVITY = { stop: 3, ask: 2, note: 1 };
const weight = (one: Pick<Lit, 'level' | 'open'>): number => GRAVITY[one.level] + (one.open ? 3 : 0);

export function litCells(findings: Finding[]): Map<string, Lit> {
	const lit = new Map<string, Lit>();
	for (const { level, open, id, cells } of findings)
		for (const cell of cells) {
			const before = lit.get(cell);
			if (!before || weight({ level, open }) > weight(before)) lit.set(cell, { level, open, id });
		}
	return lit;
}

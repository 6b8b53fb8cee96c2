import { sheetWorkSchema, type SheetWork } from '$lib/schemas/sheet-work';

/** As it lies in the database: the work, and how many questions it leaves open. */
export interface StoredWork extends SheetWork {
	open: number;
}

/** How many Stop and Ask findings of a sheet's tables still wait for an answer, as last settled. */
export function openQuestions(work: unknown): number {
	const open = (work as { open?: unknown } | null)?.open;
	return typeof open === 'number' && open > 0 ? open : 0;
}

/** The work without the count; work of an older shape counts as none. */
export function workOf(stored: unknown): SheetWork {
	const tables = (stored as { tables?: unknown } | null)?.tables;
	const read = sheetWorkSchema.safeParse({ tables: tables ?? {} });
	return read.success ? read.data : { tables: {} };
}

import type { GridWorkbook } from '$lib/schemas/sheet';
import { diffWorkbooks, type WorkbookDifference } from '$lib/assay';

export interface CompareTask {
	before: GridWorkbook;
	after: GridWorkbook;
}

/** Cell by cell; pure, in a request or in a worker alike. */
export const compareHere = ({ before, after }: CompareTask): WorkbookDifference =>
	diffWorkbooks(before, after);

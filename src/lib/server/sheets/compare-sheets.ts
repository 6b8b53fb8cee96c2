import type { WorkbookDifference } from '$lib/assay';
import type { GridWorkbook } from '$lib/schemas/sheet';
import type { Sheet } from '../database/models';
import { AppError, notFound } from '../errors';
import { fitsOfRun } from '../fits/read-fit';
import { callEngine } from '../jobs/engine-calls';
import type { Actor } from '../policy';
import { findRun } from '../runs/find';
import { currentRevision } from '../runs/revisions';
import { compareHere, type CompareTask } from './compare-here';
import source from './compare.worker.ts?nodeworker';
import { isSmall } from './examine';
import { findSheet } from './find';

export interface ComparedFile {
	id: string;
	fileName: string;
	receivedAt: Date;
}

export interface SheetComparison {
	before: ComparedFile;
	after: ComparedFile;
	difference: WorkbookDifference;
	/** Fits that a revision would leave on an older one; only where a run was named. */
	fits: { id: string; number: number }[];
}

export interface CompareInput {
	sheetId: string;
	/** The file of this run's current revision is compared with. */
	runId?: string | null;
	/** Or this one. */
	fromSheetId?: string | null;
}

const about = (sheet: Sheet): ComparedFile => ({
	id: sheet.id,
	fileName: sheet.fileName,
	receivedAt: sheet.createdAt
});

async function differenceOf(before: Sheet, after: Sheet): Promise<WorkbookDifference> {
	const task: CompareTask = { before: before.reading as GridWorkbook, after: after.reading as GridWorkbook };
	if (isSmall(task.before) && isSmall(task.after)) return compareHere(task);
	return callEngine<WorkbookDifference>({ source, task });
}

async function fileOf(actor: Actor, runId: string, studyId: string): Promise<string> {
	const run = await findRun(actor, runId, 'study.read');
	if (run.studyId !== studyId) throw notFound('run of this study');
	const { sheetId } = await currentRevision(run);
	if (sheetId) return sheetId;
	throw new AppError(
		'wrong-state',
		`Run ${run.number} was not made of a sheet; there is no file to compare.`
	);
}

/** What a sheet has otherwise than an older one of the same study, cell by cell. */
export async function compareSheets(actor: Actor, input: CompareInput): Promise<SheetComparison> {
	const after = await findSheet(actor, input.sheetId, 'study.read', { with: ['reading'] });
	const { runId } = input;
	const fromId = runId ? await fileOf(actor, runId, after.studyId) : input.fromSheetId;
	const before = await findSheet(actor, fromId, 'study.read', { with: ['reading'] });
	if (before.studyId !== after.studyId) throw notFound('sheet of this study');
	const fits = runId ? await fitsOfRun(runId) : [];
	return {
		before: about(before),
		after: about(after),
		difference: await differenceOf(before, after),
		fits: fits.map(({ id, number }) => ({ id, number }))
	};
}

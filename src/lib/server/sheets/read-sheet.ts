import type { Checks } from '$lib/assay';
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { GridWorkbook, SavedMapping } from '$lib/schemas/sheet';
import type { SheetWork } from '$lib/schemas/sheet-work';
import { Run, RunRevision, Sheet, User } from '../database/models';
import { can, type Actor } from '../policy';
import { findSheet } from './find';
import { surroundingsOf } from './surroundings';
import { openQuestions, workOf } from './work';

export interface SheetRun {
	id: string;
	number: number;
	name: string;
	version: number;
	tableKey: string;
	revision: number;
}

export interface StudyRun {
	id: string;
	number: number;
	name: string;
	version: number;
	/** Null where the run was not made of a sheet. */
	fileName: string | null;
	sheetId: string | null;
}

/** All of a sheet but what was read from it. */
export interface SheetRecord {
	id: string;
	studyId: string;
	groupId: string;
	fileName: string;
	mediaType: string;
	size: number;
	sha256: string;
	version: number;
	uploadedBy: string;
	createdAt: Date;
	/** What people have done with its tables so far. */
	work: SheetWork;
	open: number;
	species: SpeciesContent[];
	saved: SavedMapping[];
	/** Limits by which the sheet is looked through, the same in the page and in the service. */
	checks: Partial<Checks>;
	/** Runs that rest on this sheet in their current revision. */
	runs: SheetRun[];
	/** All runs of the study: this sheet may be a changed file for one of them. */
	studyRuns: StudyRun[];
	/** Name that a correction made now will carry. */
	me: string;
	/** Number that the next run of the study will have. */
	nextRunNumber: number;
	canWrite: boolean;
}

export interface SheetView extends SheetRecord {
	/** As received. */
	workbook: GridWorkbook;
}

async function runsOf(sheetId: string): Promise<SheetRun[]> {
	const revisions = await RunRevision.findAll({
		where: { sheetId },
		attributes: ['id', 'runId', 'number', 'tableKey']
	});
	const runs = await Run.findAll({
		where: { id: [...new Set(revisions.map((r) => r.runId))] },
		order: [['number', 'ASC']]
	});
	return runs.flatMap((run) => {
		const revision = revisions.find((r) => r.id === run.currentRevisionId);
		if (!revision) return [];
		const { id, number, name, version } = run;
		return [{ id, number, name, version, tableKey: revision.tableKey ?? '', revision: revision.number }];
	});
}

async function runsOfStudy(studyId: string): Promise<StudyRun[]> {
	const runs = await Run.findAll({ where: { studyId, archivedAt: null }, order: [['number', 'ASC']] });
	const revisions = await RunRevision.findAll({
		where: { id: runs.map((r) => r.currentRevisionId).filter((id) => id !== null) },
		attributes: ['id', 'runId', 'sheetId']
	});
	const sheets = await Sheet.findAll({
		where: { id: [...new Set(revisions.map((r) => r.sheetId).filter((id) => id !== null))] },
		attributes: ['id', 'fileName']
	});
	return runs.map(({ id, number, name, version, currentRevisionId }) => {
		const sheetId = revisions.find((r) => r.id === currentRevisionId)?.sheetId ?? null;
		const fileName = sheets.find((s) => s.id === sheetId)?.fileName ?? null;
		return { id, number, name, version, sheetId, fileName };
	});
}

async function recordOf(actor: Actor, sheet: Sheet): Promise<SheetRecord> {
	const [runs, studyRuns, person, surroundings, last] = await Promise.all([
		runsOf(sheet.id),
		runsOfStudy(sheet.studyId),
		User.findByPk(sheet.uploadedById, { attributes: ['id', 'name'] }),
		surroundingsOf(sheet.studyId, sheet.groupId),
		Run.max<number | null, Run>('number', { where: { studyId: sheet.studyId } })
	]);
	const { id, studyId, groupId, fileName, mediaType, size, sha256, version, createdAt } = sheet;
	return {
		id,
		studyId,
		groupId,
		fileName,
		mediaType,
		size,
		sha256,
		version,
		uploadedBy: person?.name ?? 'somebody who has left',
		createdAt,
		work: workOf(sheet.work),
		open: openQuestions(sheet.work),
		...surroundings,
		runs,
		studyRuns,
		me: actor.name,
		nextRunNumber: (last ?? 0) + 1,
		canWrite: can(actor, groupId, 'sheet.upload')
	};
}

/** The record of a sheet with the work on it and all that is needed to settle it, without the grid. */
export async function readSheetRecord(actor: Actor, sheetId: string): Promise<SheetRecord> {
	return recordOf(actor, await findSheet(actor, sheetId, 'study.read'));
}

/** The same with the sheet as received. */
export async function readSheet(actor: Actor, sheetId: string): Promise<SheetView> {
	const sheet = await findSheet(actor, sheetId, 'study.read', { with: ['reading'] });
	return { ...(await recordOf(actor, sheet)), workbook: sheet.reading as GridWorkbook };
}

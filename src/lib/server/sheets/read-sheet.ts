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

export interface SheetView {
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
	/** As received; a `GridWorkbook`. */
	workbook: GridWorkbook;
	/** What people have done with its tables so far. */
	work: SheetWork;
	open: number;
	species: SpeciesContent[];
	saved: SavedMapping[];
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

/** A sheet as received, with the work on it and all that is needed to settle it. */
export async function readSheet(actor: Actor, sheetId: string): Promise<SheetView> {
	const sheet = await findSheet(actor, sheetId, 'study.read', { with: ['reading'] });
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
		workbook: sheet.reading as GridWorkbook,
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

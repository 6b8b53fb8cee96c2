import type { RunContent } from '$lib/schemas/run';
import { RunRevision, Sheet, User } from '../database/models';
import { fitsOfRun } from '../fits/read-fit';
import { can, type Actor } from '../policy';
import { runDifferences, type Difference } from './differences';
import { findRun } from './find';

export interface RunRevisionView {
	id: string;
	number: number;
	reason: string | null;
	createdBy: string;
	createdAt: Date;
	contentHash: string;
	/** The file that this revision was read from, where it is another one than before. */
	file: { id: string; fileName: string; previousId: string | null } | null;
	/** Against the revision before it. */
	differences: Difference[];
}

export interface RunView {
	id: string;
	studyId: string;
	groupId: string;
	number: number;
	name: string;
	version: number;
	revision: number;
	revisionId: string;
	content: RunContent;
	contentHash: string;
	/** Newest first. */
	revisions: RunRevisionView[];
	sheet: { id: string; fileName: string; sha256: string } | null;
	tableKey: string | null;
	/** Fits that used this run; `superseded` where they used an older revision. */
	fits: { id: string; number: number; revision: number; superseded: boolean }[];
	createdAt: Date;
	canWrite: boolean;
}

function fileOf(
	revision: RunRevision,
	before: RunRevision | null,
	files: Map<string, string>
): RunRevisionView['file'] {
	const { sheetId } = revision;
	if (!sheetId || sheetId === before?.sheetId) return null;
	return { id: sheetId, fileName: files.get(sheetId) ?? 'a sheet', previousId: before?.sheetId ?? null };
}

function historyOf(
	revisions: RunRevision[],
	names: Map<string, string>,
	files: Map<string, string>
): RunRevisionView[] {
	return revisions
		.map((revision, i) => ({
			id: revision.id,
			number: revision.number,
			reason: revision.reason,
			createdBy: names.get(revision.createdById) ?? 'somebody who has left',
			createdAt: revision.createdAt,
			contentHash: revision.contentHash,
			file: fileOf(revision, i === 0 ? null : revisions[i - 1], files),
			differences: i === 0 ? [] : runDifferences(revisions[i - 1].content, revision.content)
		}))
		.reverse();
}

/** A run in its current revision, with its history and the fits that rest on it. */
export async function readRun(actor: Actor, runId: string): Promise<RunView> {
	const run = await findRun(actor, runId, 'study.read');
	const [revisions, fits] = await Promise.all([
		RunRevision.findAll({ where: { runId: run.id }, order: [['number', 'ASC']] }),
		fitsOfRun(run.id)
	]);
	const current = revisions.find((r) => r.id === run.currentRevisionId)!;
	const [sheets, people] = await Promise.all([
		Sheet.findAll({
			where: { id: [...new Set(revisions.map((r) => r.sheetId).filter((id) => id !== null))] },
			attributes: ['id', 'fileName', 'sha256']
		}),
		User.findAll({
			where: { id: [...new Set(revisions.map((r) => r.createdById))] },
			attributes: ['id', 'name']
		})
	]);
	const sheet = sheets.find((s) => s.id === current.sheetId);
	const numberOf = new Map(revisions.map((r) => [r.id, r.number]));
	return {
		id: run.id,
		studyId: run.studyId,
		groupId: run.groupId,
		number: run.number,
		name: run.name,
		version: run.version,
		revision: current.number,
		revisionId: current.id,
		content: current.content,
		contentHash: current.contentHash,
		revisions: historyOf(
			revisions,
			new Map(people.map((p) => [p.id, p.name])),
			new Map(sheets.map((s) => [s.id, s.fileName]))
		),
		sheet: sheet ? { id: sheet.id, fileName: sheet.fileName, sha256: sheet.sha256 } : null,
		tableKey: current.tableKey,
		fits: fits.map((fit) => ({
			id: fit.id,
			number: fit.number,
			revision: numberOf.get(fit.revisionId) ?? 0,
			superseded: fit.revisionId !== current.id
		})),
		createdAt: run.createdAt,
		canWrite: can(actor, run.groupId, 'run.write')
	};
}

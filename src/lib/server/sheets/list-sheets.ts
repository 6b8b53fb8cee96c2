import { Run, RunRevision, Sheet, User } from '../database/models';
import type { Actor } from '../policy';
import { findStudy } from '../studies/find';
import { LIGHT } from './find';
import { openQuestions } from './work';

export interface SheetSummary {
	id: string;
	fileName: string;
	size: number;
	sha256: string;
	uploadedBy: string;
	createdAt: Date;
	open: number;
	runs: { id: string; number: number; name: string }[];
}

/** Sheets of a study, newest first, with the runs that were made of each. */
export async function listSheets(actor: Actor, studyId: string): Promise<SheetSummary[]> {
	const study = await findStudy(actor, studyId, 'study.read');
	const sheets = await Sheet.findAll({
		where: { studyId: study.id },
		attributes: [...LIGHT],
		order: [['id', 'DESC']]
	});
	const [revisions, runs, people] = await Promise.all([
		RunRevision.findAll({
			where: { sheetId: sheets.map((s) => s.id) },
			attributes: ['id', 'runId', 'sheetId']
		}),
		Run.findAll({
			where: { studyId: study.id },
			attributes: ['id', 'number', 'name'],
			order: [['number', 'ASC']]
		}),
		User.findAll({
			where: { id: [...new Set(sheets.map((s) => s.uploadedById))] },
			attributes: ['id', 'name']
		})
	]);
	return sheets.map((sheet) => {
		const made = new Set(revisions.filter((r) => r.sheetId === sheet.id).map((r) => r.runId));
		const { id, fileName, size, sha256, createdAt } = sheet;
		return {
			id,
			fileName,
			size,
			sha256,
			createdAt,
			uploadedBy: people.find((p) => p.id === sheet.uploadedById)?.name ?? 'somebody who has left',
			open: openQuestions(sheet.work),
			runs: runs
				.filter((r) => made.has(r.id))
				.map(({ id: runId, number, name }) => ({ id: runId, number, name }))
		};
	});
}

import type { Quantity } from '$lib/schemas/quantity';
import { Run, RunRevision, Sheet, User } from '../database/models';
import { countValues } from '../fits/plan-fit';
import type { Actor } from '../policy';
import { findStudy } from '../studies/find';

export interface RunSummary {
	id: string;
	number: number;
	name: string;
	version: number;
	revision: number;
	revisionId: string;
	temperature: Quantity;
	timeUnit: string;
	lastTime: number | null;
	/** Species that the columns see. */
	species: string[];
	times: number;
	values: number;
	limits: number;
	excluded: number;
	sheet: { id: string; fileName: string } | null;
	tableKey: string | null;
	createdBy: string;
	createdAt: Date;
	updatedAt: Date;
}

/** Runs of a study in the order of their numbers, with what each holds. */
export async function listRuns(actor: Actor, studyId: string): Promise<RunSummary[]> {
	const study = await findStudy(actor, studyId, 'study.read');
	const runs = await Run.findAll({
		where: { studyId: study.id, archivedAt: null },
		order: [['number', 'ASC']]
	});
	const revisions = await RunRevision.findAll({
		where: { id: runs.map((r) => r.currentRevisionId).filter((id) => id !== null) }
	});
	const [sheets, people] = await Promise.all([
		Sheet.findAll({
			where: { id: [...new Set(revisions.map((r) => r.sheetId).filter((id) => id !== null))] },
			attributes: ['id', 'fileName']
		}),
		User.findAll({ where: { id: [...new Set(runs.map((r) => r.createdById))] }, attributes: ['id', 'name'] })
	]);
	return runs.flatMap((run) => {
		const revision = revisions.find((r) => r.id === run.currentRevisionId);
		if (!revision) return [];
		const sheet = sheets.find((s) => s.id === revision.sheetId);
		return [
			{
				...summaryOf(run, revision),
				sheet: sheet ? { id: sheet.id, fileName: sheet.fileName } : null,
				createdBy: people.find((p) => p.id === run.createdById)?.name ?? 'somebody who has left'
			}
		];
	});
}

function summaryOf(run: Run, revision: RunRevision): Omit<RunSummary, 'sheet' | 'createdBy'> {
	const { content } = revision;
	return {
		id: run.id,
		number: run.number,
		name: run.name,
		version: run.version,
		revision: revision.number,
		revisionId: revision.id,
		temperature: content.temperature,
		timeUnit: content.timeUnit,
		lastTime: content.timepoints.length ? Math.max(...content.timepoints.map((p) => p.time)) : null,
		species: [...new Set(content.channels.flatMap((c) => Object.keys(c.weights)))],
		...countValues(content),
		tableKey: revision.tableKey,
		createdAt: run.createdAt,
		updatedAt: run.updatedAt
	};
}

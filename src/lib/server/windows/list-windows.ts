import { Fit, User, WindowResult } from '../database/models';
import type { Actor } from '../policy';
import { findStudy } from '../studies/find';
import { windowLine } from './line';

export interface WindowSummary {
	id: string;
	number: number;
	kind: string;
	fitId: string;
	fitNumber: number;
	line: string;
	createdBy: string;
	createdAt: Date;
}

const LIMIT = 200;

/** Windows of a study, newest first. */
export async function listWindows(actor: Actor, studyId: string): Promise<WindowSummary[]> {
	const study = await findStudy(actor, studyId, 'study.read');
	const windows = await WindowResult.findAll({
		where: { studyId: study.id },
		order: [['number', 'DESC']],
		limit: LIMIT
	});
	const [fits, people] = await Promise.all([
		Fit.findAll({ where: { id: [...new Set(windows.map((w) => w.fitId))] }, attributes: ['id', 'number'] }),
		User.findAll({
			where: { id: [...new Set(windows.map((w) => w.createdById))] },
			attributes: ['id', 'name']
		})
	]);
	return windows.map(({ id, number, kind, fitId, result, createdById, createdAt }) => ({
		id,
		number,
		kind,
		fitId,
		fitNumber: fits.find((f) => f.id === fitId)?.number ?? 0,
		line: windowLine(kind, result),
		createdBy: people.find((p) => p.id === createdById)?.name ?? 'somebody who has left',
		createdAt
	}));
}

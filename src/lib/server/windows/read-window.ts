import type { FirstFormRequest, FirstFormResult } from '$lib/schemas/window';
import { Fit, User, WindowResult } from '../database/models';
import { notFound } from '../errors';
import { isId } from '../ids';
import { can, requireCan, type Actor } from '../policy';
import { groupsInSight } from '../studies/find';

export interface WindowView {
	id: string;
	studyId: string;
	groupId: string;
	fitId: string;
	fitNumber: number;
	number: number;
	kind: string;
	input: FirstFormRequest;
	result: FirstFormResult;
	engineVersion: string;
	seed: number;
	createdBy: string;
	createdAt: Date;
	canWrite: boolean;
}

export async function readWindow(actor: Actor, windowId: string): Promise<WindowView> {
	if (!isId(windowId)) throw notFound('window');
	const window = await WindowResult.findOne({ where: { id: windowId, groupId: groupsInSight(actor) } });
	if (!window) throw notFound('window');
	requireCan(actor, window.groupId, 'study.read', 'window');
	const [fit, author] = await Promise.all([
		Fit.findByPk(window.fitId, { attributes: ['id', 'number'] }),
		User.findByPk(window.createdById, { attributes: ['id', 'name'] })
	]);
	const { id, studyId, groupId, fitId, number, kind, input, result, engineVersion, seed, createdAt } = window;
	return {
		id,
		studyId,
		groupId,
		fitId,
		fitNumber: fit?.number ?? 0,
		number,
		kind,
		input: input as FirstFormRequest,
		result: result as FirstFormResult,
		engineVersion,
		seed,
		createdBy: author?.name ?? 'somebody who has left',
		createdAt,
		canWrite: can(actor, groupId, 'study.write')
	};
}

import type { Tx } from '../database';
import { Scheme, Study } from '../database/models';
import { notFound } from '../errors';
import { isId } from '../ids';
import { groupsWhere, requireCan, type Action, type Actor } from '../policy';

/**
 * Groups whose work the person may look into by role. A token's scopes are asked afterwards, for what it is about
 * to do, so that one without the scope learns that (403) and not that nothing is there (404).
 */
export const groupsInSight = (actor: Actor): string[] =>
	groupsWhere({ ...actor, scopes: undefined }, 'study.read');

/** The study, if it is in sight and the actor may do this with it. */
export async function findStudy(actor: Actor, studyId: unknown, action: Action, tx?: Tx): Promise<Study> {
	if (!isId(studyId)) throw notFound('study');
	const study = await Study.findOne({
		where: { id: studyId, groupId: groupsInSight(actor) },
		transaction: tx
	});
	if (!study) throw notFound('study');
	requireCan(actor, study.groupId, action, 'study');
	return study;
}

export async function findScheme(actor: Actor, schemeId: unknown, action: Action, tx?: Tx): Promise<Scheme> {
	if (!isId(schemeId)) throw notFound('scheme');
	const scheme = await Scheme.findOne({
		where: { id: schemeId, groupId: groupsInSight(actor) },
		transaction: tx
	});
	if (!scheme) throw notFound('scheme');
	requireCan(actor, scheme.groupId, action, 'scheme');
	return scheme;
}

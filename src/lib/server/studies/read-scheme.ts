import type { SchemeContent } from '$lib/schemas/scheme';
import { SchemeVersion, User, type Scheme } from '../database/models';
import { notFound } from '../errors';
import { can, type Actor } from '../policy';
import { findScheme } from './find';
import { newestVersions } from './scheme-versions';

export interface SchemeView {
	id: string;
	studyId: string;
	groupId: string;
	name: string;
	/** Names the state of the record that a save must quote. */
	version: number;
	/** Number and id of the scheme version shown. */
	number: number;
	versionId: string;
	content: SchemeContent;
	savedBy: string;
	savedAt: Date;
	updatedAt: Date;
	canWrite: boolean;
}

export async function schemeView(actor: Actor, scheme: Scheme, version: SchemeVersion): Promise<SchemeView> {
	const author = await User.findByPk(version.createdById, { attributes: ['id', 'name'] });
	return {
		id: scheme.id,
		studyId: scheme.studyId,
		groupId: scheme.groupId,
		name: scheme.name,
		version: scheme.version,
		number: version.number,
		versionId: version.id,
		content: version.content,
		savedBy: author?.name ?? 'somebody who has left',
		savedAt: version.createdAt,
		updatedAt: scheme.updatedAt,
		canWrite: can(actor, scheme.groupId, 'study.write')
	};
}

/** A scheme in its newest version, or in the version with this number. */
export async function readScheme(
	actor: Actor,
	schemeId: string,
	options: { number?: number } = {}
): Promise<SchemeView> {
	const scheme = await findScheme(actor, schemeId, 'study.read');
	const version =
		options.number === undefined
			? (await newestVersions([scheme.id])).get(scheme.id)
			: await SchemeVersion.findOne({ where: { schemeId: scheme.id, number: options.number } });
	if (!version) throw notFound('version of this scheme');
	return schemeView(actor, scheme, version);
}

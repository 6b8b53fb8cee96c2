import { schemeContent, type SchemeContent } from '$lib/schemas/scheme';
import { appendAudit } from '../audit/append';
import { contentHash } from '../audit/canonical';
import { write, type Tx } from '../database';
import { Scheme, User, type SchemeVersion } from '../database/models';
import { notFound, versionChanged, type AppError } from '../errors';
import type { Actor } from '../policy';
import { schemeName } from './create-scheme';
import { findScheme } from './find';
import { addVersion, changeInWords, newestVersions } from './scheme-versions';

export interface SaveSchemeInput {
	schemeId: string;
	/** The record's version that the change was made on. */
	version: number;
	content?: SchemeContent;
	name?: string;
}

export interface SavedScheme {
	version: number;
	number: number;
	versionId: string;
	savedAt: Date;
}

/** What the page needs to set both sides beside each other. */
async function conflict(tx: Tx, scheme: Scheme, newest: SchemeVersion): Promise<AppError> {
	const author = await User.findByPk(newest.createdById, { attributes: ['id', 'name'], transaction: tx });
	return versionChanged({
		version: scheme.version,
		name: scheme.name,
		number: newest.number,
		versionId: newest.id,
		content: newest.content,
		savedBy: author?.name ?? 'somebody who has left',
		savedAt: newest.createdAt.toISOString()
	});
}

async function rename(tx: Tx, actor: Actor, scheme: Scheme, to: string): Promise<void> {
	if (to === scheme.name) return;
	await appendAudit(tx, actor, {
		type: 'scheme.renamed',
		payload: { from: scheme.name, to },
		groupId: scheme.groupId,
		studyId: scheme.studyId,
		objectType: 'scheme',
		objectId: scheme.id
	});
}

async function newVersion(
	tx: Tx,
	actor: Actor,
	scheme: Scheme,
	newest: SchemeVersion,
	content: SchemeContent
): Promise<SchemeVersion> {
	const version = await addVersion(tx, {
		schemeId: scheme.id,
		number: newest.number + 1,
		content,
		createdById: actor.userId
	});
	await appendAudit(tx, actor, {
		type: 'scheme.version-saved',
		payload: {
			number: version.number,
			contentHash: version.contentHash,
			summary: changeInWords(newest.content, content)
		},
		groupId: scheme.groupId,
		studyId: scheme.studyId,
		objectType: 'scheme',
		objectId: scheme.id,
		objectVersion: version.number
	});
	return version;
}

/**
 * Saves a draft: a new version of the content where it differs from the newest, a new name, or both.
 * Stale input is refused with the newer state, so that nothing is overwritten unseen.
 */
export async function saveScheme(actor: Actor, input: SaveSchemeInput): Promise<SavedScheme> {
	await findScheme(actor, input.schemeId, 'study.write');
	const content = input.content === undefined ? undefined : schemeContent.parse(input.content);
	const name = input.name === undefined ? undefined : schemeName(input.name);
	return write(async (tx) => {
		const scheme = await findScheme(actor, input.schemeId, 'study.write', tx);
		const newest = (await newestVersions([scheme.id], tx)).get(scheme.id);
		if (!newest) throw notFound('version of this scheme');
		if (scheme.version !== input.version) throw await conflict(tx, scheme, newest);
		const changed = content !== undefined && contentHash(content) !== newest.contentHash;
		const renamed = name !== undefined && name !== scheme.name;
		if (!changed && !renamed)
			return {
				version: scheme.version,
				number: newest.number,
				versionId: newest.id,
				savedAt: newest.createdAt
			};
		const savedAt = new Date();
		const [count] = await Scheme.update(
			{ name: name ?? scheme.name, version: input.version + 1, updatedAt: savedAt },
			{ where: { id: scheme.id, version: input.version }, transaction: tx }
		);
		if (count !== 1) throw await conflict(tx, scheme, newest);
		if (name !== undefined) await rename(tx, actor, scheme, name);
		const version = changed ? await newVersion(tx, actor, scheme, newest, content) : newest;
		return { version: input.version + 1, number: version.number, versionId: version.id, savedAt };
	});
}

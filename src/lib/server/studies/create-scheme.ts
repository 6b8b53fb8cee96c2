import { emptyScheme, schemeContent, type SchemeContent } from '$lib/schemas/scheme';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Scheme, SchemeVersion, Study } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { findStudy } from './find';
import { addVersion, sizeInWords } from './scheme-versions';

export interface CreateSchemeInput {
	studyId: string;
	name: string;
	content?: SchemeContent;
}

export interface CreatedScheme {
	id: string;
	version: number;
	number: number;
	versionId: string;
}

export function schemeName(name: string): string {
	const trimmed = name.trim();
	if (trimmed.length >= 1 && trimmed.length <= 80) return trimmed;
	throw new AppError('invalid', 'Give the scheme a name of 1 to 80 letters.', {
		fields: [{ field: 'name', message: 'Give the scheme a name of 1 to 80 letters.' }]
	});
}

/** The rows of a new scheme and of its first version, with their audit entries. */
export async function addScheme(
	tx: Tx,
	actor: Actor,
	study: Study,
	input: { name: string; content: SchemeContent }
): Promise<{ scheme: Scheme; version: SchemeVersion }> {
	const position = await Scheme.count({ where: { studyId: study.id }, transaction: tx });
	const scheme = await Scheme.create(
		{
			studyId: study.id,
			groupId: study.groupId,
			name: input.name,
			position,
			createdById: actor.userId,
			updatedAt: new Date()
		},
		{ transaction: tx }
	);
	const version = await addVersion(tx, {
		schemeId: scheme.id,
		number: 1,
		content: input.content,
		createdById: actor.userId
	});
	const about = { groupId: study.groupId, studyId: study.id, objectType: 'scheme', objectId: scheme.id };
	await appendAudit(tx, actor, { type: 'scheme.created', payload: { name: input.name }, ...about });
	await appendAudit(tx, actor, {
		type: 'scheme.version-saved',
		payload: { number: 1, contentHash: version.contentHash, summary: sizeInWords(input.content) },
		objectVersion: 1,
		...about
	});
	return { scheme, version };
}

/** Another candidate scheme in a study. */
export async function createScheme(actor: Actor, input: CreateSchemeInput): Promise<CreatedScheme> {
	await findStudy(actor, input.studyId, 'study.write');
	const name = schemeName(input.name);
	const content = schemeContent.parse(input.content ?? emptyScheme());
	return write(async (tx) => {
		const study = await findStudy(actor, input.studyId, 'study.write', tx);
		const { scheme, version } = await addScheme(tx, actor, study, { name, content });
		return { id: scheme.id, version: scheme.version, number: version.number, versionId: version.id };
	});
}

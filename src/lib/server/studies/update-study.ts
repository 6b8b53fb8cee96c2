import { z } from 'zod';
import { studyForm } from '$lib/schemas/study';
import { appendAudit } from '../audit/append';
import { contentHash } from '../audit/canonical';
import { write, type Tx } from '../database';
import { Criterion, Study } from '../database/models';
import { versionChanged } from '../errors';
import type { Actor } from '../policy';
import { findStudy } from './find';
import { criteriaOf } from './read-study';

export const studyChanges = z.object({
	name: studyForm.shape.name.optional(),
	decision: studyForm.shape.decision.optional(),
	criteria: z.array(studyForm.shape.criteria.unwrap().element).max(20).optional()
});
export type StudyChanges = z.infer<typeof studyChanges>;

export interface UpdateStudyInput extends StudyChanges {
	studyId: string;
	version: number;
}

async function replaceCriteria(
	tx: Tx,
	studyId: string,
	criteria: StudyChanges['criteria'] & {}
): Promise<void> {
	await Criterion.destroy({ where: { studyId }, transaction: tx });
	await Criterion.bulkCreate(
		criteria.map((content, position) => ({ studyId, position, content })),
		{ transaction: tx }
	);
}

/** Changes the name, the decision or the criteria of a study; what was before stays in the audit trail. */
export async function updateStudy(
	actor: Actor,
	input: UpdateStudyInput
): Promise<{ version: number; savedAt: Date }> {
	await findStudy(actor, input.studyId, 'study.write');
	const asked = studyChanges.parse(input);
	return write(async (tx) => {
		const study = await findStudy(actor, input.studyId, 'study.write', tx);
		const before: StudyChanges = {
			name: study.name,
			decision: study.decision,
			criteria: await criteriaOf(study.id, tx)
		};
		if (study.version !== input.version) throw versionChanged({ version: study.version, ...before });
		const changes = (['name', 'decision', 'criteria'] as const).flatMap((field) => {
			const to = asked[field];
			if (to === undefined || contentHash(to) === contentHash(before[field])) return [];
			return [{ field, from: before[field], to }];
		});
		if (changes.length === 0) return { version: study.version, savedAt: study.updatedAt };
		const savedAt = new Date();
		const [count] = await Study.update(
			{
				name: asked.name ?? study.name,
				decision: asked.decision ?? study.decision,
				version: input.version + 1,
				updatedAt: savedAt
			},
			{ where: { id: study.id, version: input.version }, transaction: tx }
		);
		if (count !== 1) throw versionChanged({ version: study.version, ...before });
		if (asked.criteria) await replaceCriteria(tx, study.id, asked.criteria);
		await appendAudit(tx, actor, {
			type: 'study.changed',
			payload: { changes },
			groupId: study.groupId,
			studyId: study.id,
			objectType: 'study',
			objectId: study.id,
			objectVersion: input.version + 1
		});
		return { version: input.version + 1, savedAt };
	});
}

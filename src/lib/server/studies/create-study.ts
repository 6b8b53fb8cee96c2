import { studyForm, type StudyForm } from '$lib/schemas/study';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Criterion, Study } from '../database/models';
import { requireCan, type Actor } from '../policy';
import { addScheme } from './create-scheme';
import { trayOf } from './scheme-versions';
import { speciesNamed } from './criteria';

export interface CreateStudyInput extends StudyForm {
	groupId: string;
}

export interface CreatedStudy {
	id: string;
	version: number;
	schemeId: string;
}

/** A new study with its decision and criteria, and a first scheme whose tray holds the species that the criteria name. */
export async function createStudy(actor: Actor, input: CreateStudyInput): Promise<CreatedStudy> {
	requireCan(actor, input.groupId, 'study.write', 'group');
	const { name, decision, criteria } = studyForm.parse(input);
	return write(async (tx) => {
		const study = await Study.create(
			{ groupId: input.groupId, name, decision, createdById: actor.userId, updatedAt: new Date() },
			{ transaction: tx }
		);
		await Criterion.bulkCreate(
			criteria.map((content, position) => ({ studyId: study.id, position, content })),
			{ transaction: tx }
		);
		await appendAudit(tx, actor, {
			type: 'study.created',
			payload: { name, decision },
			groupId: study.groupId,
			studyId: study.id,
			objectType: 'study',
			objectId: study.id,
			objectVersion: 1
		});
		const { scheme } = await addScheme(tx, actor, study, {
			name: 'Scheme 1',
			content: trayOf(speciesNamed(criteria))
		});
		return { id: study.id, version: study.version, schemeId: scheme.id };
	});
}

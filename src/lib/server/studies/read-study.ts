import type { CriterionContent } from '$lib/schemas/study';
import type { SchemeContent } from '$lib/schemas/scheme';
import type { Tx } from '../database';
import { Criterion, Group, Scheme, User, type Study } from '../database/models';
import { can, type Actor } from '../policy';
import { findStudy } from './find';
import { newestVersions } from './scheme-versions';
import { stationLines, type StationLines } from './station-lines';

export interface StudyScheme {
	id: string;
	name: string;
	version: number;
	number: number;
	versionId: string;
	content: SchemeContent;
	updatedAt: Date;
}

export interface StudyView {
	study: {
		id: string;
		groupId: string;
		name: string;
		decision: string;
		version: number;
		createdBy: string;
		createdAt: Date;
		updatedAt: Date;
	};
	criteria: CriterionContent[];
	schemes: StudyScheme[];
	/** One live line a station: where it stands. */
	stations: StationLines;
	canWrite: boolean;
	groupName: string;
}

export async function criteriaOf(studyId: string, tx?: Tx): Promise<CriterionContent[]> {
	const rows = await Criterion.findAll({ where: { studyId }, order: [['position', 'ASC']], transaction: tx });
	return rows.map((row) => row.content);
}

export async function schemesOf(studyId: string): Promise<StudyScheme[]> {
	const schemes = await Scheme.findAll({
		where: { studyId, archivedAt: null },
		order: [
			['position', 'ASC'],
			['id', 'ASC']
		]
	});
	const newest = await newestVersions(schemes.map((s) => s.id));
	return schemes.flatMap((scheme) => {
		const version = newest.get(scheme.id);
		if (!version) return [];
		const { id, name, updatedAt } = scheme;
		return [
			{
				id,
				name,
				version: scheme.version,
				number: version.number,
				versionId: version.id,
				content: version.content,
				updatedAt
			}
		];
	});
}

function summary(study: Study, createdBy: string): StudyView['study'] {
	const { id, groupId, name, decision, version, createdAt, updatedAt } = study;
	return { id, groupId, name, decision, version, createdBy, createdAt, updatedAt };
}

/** All that the study page's frame needs, in one round. */
export async function readStudy(actor: Actor, studyId: string): Promise<StudyView> {
	const study = await findStudy(actor, studyId, 'study.read');
	const [criteria, schemes, group, author] = await Promise.all([
		criteriaOf(study.id),
		schemesOf(study.id),
		Group.findByPk(study.groupId, { attributes: ['id', 'name'] }),
		User.findByPk(study.createdById, { attributes: ['id', 'name'] })
	]);
	return {
		study: summary(study, author?.name ?? 'somebody who has left'),
		criteria,
		schemes,
		stations: await stationLines(study.id, schemes),
		canWrite: can(actor, study.groupId, 'study.write'),
		groupName: group?.name ?? ''
	};
}

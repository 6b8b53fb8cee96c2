import { col, fn, Op, type WhereOptions } from 'sequelize';
import { Fit, Group, Run, Scheme, Study, User } from '../database/models';
import { containing, wordsOf } from '../database/text-filter';
import { isId } from '../ids';
import { requireCan, type Actor } from '../policy';

export interface StudySummary {
	id: string;
	groupId: string;
	groupName: string;
	name: string;
	decision: string;
	version: number;
	createdBy: string;
	createdAt: Date;
	updatedAt: Date;
	schemes: number;
	runs: number;
	fits: number;
}

export interface ListStudiesInput {
	groupId: string;
	/** Text that the name or the decision must hold. */
	filter?: string;
	/** Id of the last study of the page before. */
	after?: string;
	limit?: number;
}

export interface StudyPage {
	items: StudySummary[];
	next: string | null;
	total: number;
}

type Counted = typeof Run | typeof Fit | typeof Scheme;

async function countsOf(model: Counted, studyIds: string[]): Promise<Map<string, number>> {
	const rows = (await (model as typeof Run).findAll({
		attributes: ['studyId', [fn('COUNT', col('id')), 'n']],
		where: { studyId: studyIds },
		group: ['studyId'],
		raw: true
	})) as unknown as { studyId: string; n: number }[];
	return new Map(rows.map((row) => [row.studyId, Number(row.n)]));
}

function matching(groupId: string, filter = ''): WhereOptions {
	return {
		groupId,
		archivedAt: null,
		[Op.and]: wordsOf(filter).map((word) => ({
			[Op.or]: [{ name: containing(word) }, { decision: containing(word) }]
		}))
	};
}

async function summaries(studies: Study[], groupId: string): Promise<StudySummary[]> {
	const ids = studies.map((s) => s.id);
	const [schemes, runs, fits, people, group] = await Promise.all([
		countsOf(Scheme, ids),
		countsOf(Run, ids),
		countsOf(Fit, ids),
		User.findAll({
			where: { id: [...new Set(studies.map((s) => s.createdById))] },
			attributes: ['id', 'name']
		}),
		Group.findByPk(groupId, { attributes: ['id', 'name'] })
	]);
	const names = new Map(people.map((p) => [p.id, p.name]));
	return studies.map((study) => ({
		id: study.id,
		groupId: study.groupId,
		groupName: group?.name ?? '',
		name: study.name,
		decision: study.decision,
		version: study.version,
		createdBy: names.get(study.createdById) ?? 'somebody who has left',
		createdAt: study.createdAt,
		updatedAt: study.updatedAt,
		schemes: schemes.get(study.id) ?? 0,
		runs: runs.get(study.id) ?? 0,
		fits: fits.get(study.id) ?? 0
	}));
}

/** Studies of a group, newest first, a page at a time. */
export async function listStudies(actor: Actor, input: ListStudiesInput): Promise<StudyPage> {
	requireCan(actor, input.groupId, 'study.read', 'group');
	const limit = Math.min(Math.max(Math.trunc(input.limit ?? 25), 1), 100);
	const where = matching(input.groupId, input.filter);
	const [total, found] = await Promise.all([
		Study.count({ where }),
		Study.findAll({
			where: isId(input.after) ? { [Op.and]: [where, { id: { [Op.lt]: input.after } }] } : where,
			order: [['id', 'DESC']],
			limit: limit + 1
		})
	]);
	const studies = found.slice(0, limit);
	return {
		items: await summaries(studies, input.groupId),
		next: found.length > limit ? (studies.at(-1)?.id ?? null) : null,
		total
	};
}

import { Op, type WhereOptions } from 'sequelize';
import { z } from 'zod';
import { AuditEvent, Group, Study } from '../database/models';
import { notAllowed } from '../errors';
import { groupsWhere, type Actor } from '../policy';
import { describe, type Described } from './describe';

const day = z.iso.date('Write the date as 2026-12-01.');
const blank = <T extends z.ZodType>(schema: T) =>
	z.preprocess((v) => (v === '' || v === null ? undefined : v), schema.optional());

/** What the trail can be narrowed to; blank fields narrow nothing. */
export const auditFilter = z.object({
	group: blank(z.uuid()),
	study: blank(z.uuid()),
	object: blank(z.uuid()),
	objectType: blank(z.string().max(60)),
	type: blank(z.string().max(60)),
	person: blank(z.string().trim().max(120)),
	from: blank(day),
	to: blank(day)
});
export type AuditFilter = z.infer<typeof auditFilter>;

export interface AuditLine extends Described {
	seq: number;
	at: string;
	printedName: string;
	userId: string | null;
	role: string | null;
	source: string;
	groupId: string | null;
	groupName: string | null;
	studyId: string | null;
	studyName: string | null;
	objectType: string;
	objectId: string | null;
	objectVersion: number | null;
	type: string;
	payload: unknown;
	reason: string | null;
	prevHash: string;
	hash: string;
}

export interface AuditPage {
	items: AuditLine[];
	/** Pass as `before` to see older entries. */
	next: number | null;
	total: number;
}

/** Entries of the groups where the actor may read the trail; entries that belong to no group are the site admin's. */
function within(actor: Actor): WhereOptions<AuditEvent> {
	const groups = groupsWhere(actor, 'audit.read');
	const site = actor.siteAdmin && !actor.scopes;
	if (groups.length === 0 && !site) throw notAllowed('The audit trail is for QA reviewers and group leads.');
	const own = { groupId: { [Op.in]: groups } };
	return site ? { [Op.or]: [own, { groupId: null }] } : own;
}

const dayAfter = (date: string): string => {
	const next = new Date(`${date}T00:00:00Z`);
	next.setUTCDate(next.getUTCDate() + 1);
	return next.toISOString();
};

function narrowed(filter: AuditFilter): WhereOptions<AuditEvent>[] {
	const plain = filter.person?.replace(/[\\%_]/g, '');
	return [
		filter.group ? { groupId: filter.group } : null,
		filter.study ? { studyId: filter.study } : null,
		filter.object ? { objectId: filter.object } : null,
		filter.objectType ? { objectType: filter.objectType } : null,
		filter.type ? { type: { [Op.like]: `${filter.type.replace(/[\\%_]/g, '')}%` } } : null,
		plain ? { printedName: { [Op.like]: `%${plain}%` } } : null,
		filter.from ? { at: { [Op.gte]: `${filter.from}T00:00:00.000Z` } } : null,
		filter.to ? { at: { [Op.lt]: dayAfter(filter.to) } } : null
	].filter((part) => part !== null);
}

async function namesFor(
	rows: AuditEvent[]
): Promise<{ groups: Map<string, string>; studies: Map<string, string> }> {
	const ids = (pick: (row: AuditEvent) => string | null) => [
		...new Set(rows.map(pick).filter((id) => id !== null))
	];
	const [groups, studies] = await Promise.all([
		Group.findAll({ where: { id: ids((r) => r.groupId) }, attributes: ['id', 'name'] }),
		Study.findAll({ where: { id: ids((r) => r.studyId) }, attributes: ['id', 'name'] })
	]);
	return {
		groups: new Map(groups.map((g) => [g.id, g.name])),
		studies: new Map(studies.map((s) => [s.id, s.name]))
	};
}

async function toLines(rows: AuditEvent[]): Promise<AuditLine[]> {
	const names = await namesFor(rows);
	return rows.map((row) => {
		const { payload, ...fields } = row.get({ plain: true });
		return {
			...fields,
			payload: parsed(payload),
			groupName: row.groupId ? (names.groups.get(row.groupId) ?? null) : null,
			studyName: row.studyId ? (names.studies.get(row.studyId) ?? null) : null,
			...describe(row.type, payload)
		};
	});
}

/** A tampered entry must still be shown, so that it can be seen what stands there now. */
function parsed(payload: string): unknown {
	try {
		return JSON.parse(payload);
	} catch {
		return payload;
	}
}

/** The trail, newest entry first, paged by sequence number. */
export async function listAudit(
	actor: Actor,
	input: { filter?: AuditFilter; before?: number; limit?: number } = {}
): Promise<AuditPage> {
	const scope: WhereOptions<AuditEvent> = {
		[Op.and]: [within(actor), ...narrowed(input.filter ?? {})]
	};
	const limit = Math.min(Math.max(input.limit ?? 50, 1), 500);
	const where = input.before ? { [Op.and]: [scope, { seq: { [Op.lt]: input.before } }] } : scope;
	const [rows, total] = await Promise.all([
		AuditEvent.findAll({ where, order: [['seq', 'DESC']], limit: limit + 1 }),
		AuditEvent.count({ where: scope })
	]);
	const shown = rows.slice(0, limit);
	return {
		items: await toLines(shown),
		next: rows.length > limit ? shown[shown.length - 1].seq : null,
		total
	};
}

export interface AuditChoices {
	groups: { id: string; name: string }[];
	studies: { id: string; name: string }[];
	objectTypes: string[];
	mayVerify: boolean;
}

/** What the filter offers: only groups and studies whose trail the actor may read. */
export async function auditChoices(actor: Actor): Promise<AuditChoices> {
	const scope = within(actor);
	const ids = groupsWhere(actor, 'audit.read');
	const [studies, types] = await Promise.all([
		Study.findAll({
			where: { groupId: ids },
			attributes: ['id', 'name'],
			order: [['id', 'DESC']],
			limit: 300
		}),
		AuditEvent.findAll({ where: scope, attributes: ['objectType'], group: ['objectType'], raw: true })
	]);
	return {
		groups: actor.memberships
			.filter((m) => ids.includes(m.groupId))
			.map((m) => ({ id: m.groupId, name: m.groupName })),
		studies: studies.map((s) => ({ id: s.id, name: s.name })),
		objectTypes: types.map((t) => t.objectType).sort(),
		mayVerify: actor.siteAdmin || groupsWhere(actor, 'audit.verify').length > 0
	};
}

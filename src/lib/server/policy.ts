import { notAllowed, notFound } from './errors';

export const ROLES = ['chemist', 'group_lead', 'qa_reviewer', 'reader'] as const;
export type Role = (typeof ROLES)[number];
export const ROLE_NAMES: Record<Role, string> = {
	chemist: 'Chemist',
	group_lead: 'Group lead',
	qa_reviewer: 'QA reviewer',
	reader: 'Reader'
};

export const SCOPES = ['read', 'write', 'fit', 'export'] as const;
export type Scope = (typeof SCOPES)[number];

/** Who acts: a person, on a page or through a token. Built once a request, never from what the request says of itself. */
export interface Actor {
	userId: string;
	name: string;
	email: string;
	siteAdmin: boolean;
	memberships: { groupId: string; groupName: string; role: Role }[];
	/** 'screen', 'token: <name>' or 'system'. */
	source: string;
	/** Only for tokens: what it may do at most. A page's actor has none and is limited by role alone. */
	scopes?: Scope[];
	/** When this session's password was last given; null for tokens. */
	signedInAt: Date | null;
}

interface Rule {
	roles: readonly Role[];
	/** Scope that a token needs; null: no token may ever do it. */
	scope: Scope | null;
}

const content: readonly Role[] = ['chemist', 'group_lead'];
const insight: readonly Role[] = ['chemist', 'group_lead', 'qa_reviewer'];
const everyone: readonly Role[] = ROLES;

/** The permission table: what is not listed is refused. */
const TABLE = {
	'study.read': { roles: insight, scope: 'read' },
	'study.write': { roles: content, scope: 'write' },
	'sheet.upload': { roles: content, scope: 'write' },
	'run.write': { roles: content, scope: 'write' },
	'fit.run': { roles: content, scope: 'fit' },
	'window.run': { roles: content, scope: 'fit' },
	'recipe.read': { roles: insight, scope: 'read' },
	'recipe.write': { roles: content, scope: 'write' },
	'recipe.submit': { roles: content, scope: 'write' },
	'recipe.comment': { roles: insight, scope: 'write' },
	'recipe.return': { roles: ['group_lead'], scope: 'write' },
	'recipe.validate': { roles: ['group_lead'], scope: null },
	'recipe.verify': { roles: ['qa_reviewer'], scope: null },
	'recipe.share': { roles: ['group_lead'], scope: 'write' },
	'recipe.withdraw': { roles: ['group_lead'], scope: 'write' },
	'recipe.readShared': { roles: everyone, scope: 'read' },
	'recipe.acknowledge': { roles: everyone, scope: null },
	'workbook.export': { roles: ['qa_reviewer', 'group_lead'], scope: 'export' },
	'audit.read': { roles: ['qa_reviewer', 'group_lead'], scope: 'read' },
	'audit.verify': { roles: ['qa_reviewer', 'group_lead'], scope: 'read' },
	'members.read': { roles: everyone, scope: 'read' },
	'members.invite': { roles: ['group_lead'], scope: null },
	'group.limits': { roles: ['group_lead'], scope: null }
} as const satisfies Record<string, Rule>;

export type Action = keyof typeof TABLE;

export function roleIn(actor: Actor, groupId: string): Role | null {
	return actor.memberships.find((m) => m.groupId === groupId)?.role ?? null;
}

export function can(actor: Actor, groupId: string, action: Action): boolean {
	const rule: Rule = TABLE[action];
	const role = roleIn(actor, groupId);
	if (!role || !rule.roles.includes(role)) return false;
	if (!actor.scopes) return true;
	return rule.scope !== null && actor.scopes.includes(rule.scope);
}

/**
 * First line of every use case. Somebody with no insight into the group learns nothing (404);
 * somebody who may look but not do is told so (403).
 */
export function requireCan(actor: Actor, groupId: string, action: Action, what = 'record'): void {
	if (can(actor, groupId, action)) return;
	const role = roleIn(actor, groupId);
	const seesGroup = role !== null && TABLE['study.read'].roles.includes(role);
	const ownMembers = role !== null && action.startsWith('members.');
	if (!seesGroup && !ownMembers) throw notFound(what);
	throw notAllowed(
		actor.scopes
			? 'This token is not allowed to do that; signing and membership are for signed-in people only.'
			: undefined
	);
}

/** Groups in which the actor may do this: goes into the query, so that nothing else is ever fetched. */
export function groupsWhere(actor: Actor, action: Action): string[] {
	return actor.memberships.filter((m) => can(actor, m.groupId, action)).map((m) => m.groupId);
}

export function requireSiteAdmin(actor: Actor): void {
	if (!actor.siteAdmin || actor.scopes) throw notFound();
}

import { ROLE_NAMES, type Role } from '../policy';
import { AUDIT_EVENTS, type AuditPayload, type AuditType } from './events';

export interface Change {
	label: string;
	from: string | null;
	to: string | null;
}

export interface Described {
	/** What happened, as a sentence without the person's name. */
	line: string;
	/** What was before and after, field by field. */
	details: Change[];
}

type Writer<T extends AuditType> = (payload: AuditPayload<T>) => string | Described;

const roleName = (role: string | null): string => {
	if (role === 'site_admin') return 'site admin';
	return role ? (ROLE_NAMES[role as Role]?.toLowerCase() ?? role) : 'no role';
};
const kilobytes = (size: number): string => `${Math.max(1, Math.round(size / 1024))} kB`;
const short = (hash: string): string => hash.slice(0, 8);

/** A value in words that fit into a line. */
export function shown(value: unknown): string | null {
	if (value === null || value === undefined || value === '') return null;
	if (typeof value === 'string') return value;
	if (typeof value === 'boolean') return value ? 'yes' : 'no';
	if (typeof value === 'number' || typeof value === 'bigint') return String(value);
	return JSON.stringify(value);
}

const changesOf = (changes: { field: string; from?: unknown; to?: unknown }[]): Change[] =>
	changes.map((c) => ({ label: spoken(c.field), from: shown(c.from), to: shown(c.to) }));

/** Leaves of a nested value by dotted path, so that two of them can be compared field by field. */
function leaves(value: unknown, path = ''): Map<string, unknown> {
	if (value === null || typeof value !== 'object') return new Map([[path, value]]);
	const all = new Map<string, unknown>();
	for (const [key, inner] of Object.entries(value))
		for (const [p, leaf] of leaves(inner, path ? `${path}.${key}` : key)) all.set(p, leaf);
	return all;
}

/** `safetyRules.0.contact` as a person says it: "safety rules 1, contact". */
function spoken(path: string): string {
	const words = path.replace(
		/([a-z\d])([A-Z])/g,
		(_, end: string, start: string) => `${end} ${start.toLowerCase()}`
	);
	return words.replace(/\.(\d+)/g, (_, index: string) => ` ${Number(index) + 1}`).replaceAll('.', ', ');
}

export function differences(from: unknown, to: unknown): Change[] {
	const [before, after] = [leaves(from), leaves(to)];
	return [...new Set([...before.keys(), ...after.keys()])]
		.filter((path) => before.get(path) !== after.get(path))
		.map((path) => ({ label: spoken(path), from: shown(before.get(path)), to: shown(after.get(path)) }));
}

const channelOf = (channel: string | null): string => (channel ? `, channel ${channel}` : '');

/** A new kind of entry gets its sentence here. */
export const WRITERS: { [T in AuditType]?: Writer<T> } = {
	'person.signed-in': () => 'Signed in',
	'person.sign-in-failed': (p) =>
		`Sign-in failed for ${p.email}${p.lockedUntil ? '; locked for a while' : ''}`,
	'person.password-check-failed': (p) =>
		`Wrong password when asked again (${p.failures})${p.lockedUntil ? '; locked for a while' : ''}`,
	'person.signed-out': (p) => (p.everywhere ? 'Signed out on every device' : 'Signed out'),
	'person.created': (p) => `Account of ${p.name} (${p.email}) made${p.siteAdmin ? ', as site admin' : ''}`,
	'person.renamed': (p) => ({
		line: 'Name changed',
		details: [{ label: 'name', from: p.from, to: p.to }]
	}),
	'person.disabled': (p) => `${p.email} disabled`,
	'person.enabled': (p) => `${p.email} enabled again`,
	'person.admin-changed': (p) => (p.siteAdmin ? 'Made site admin' : 'No longer site admin'),
	'person.password-changed': (p) =>
		({ self: 'Password changed', reset: 'Password set by reset link', invitation: 'Password set' })[p.by],
	'person.password-reset-asked': () => 'Asked for a link to set a new password',
	'group.created': (p) => `Group ${p.name} made, ${p.gxp ? 'under GxP' : 'not under GxP'}`,
	'group.changed': (p) => ({ line: 'Group changed', details: differences(p.from, p.to) }),
	'member.invited': (p) => `${p.email} invited as ${roleName(p.role)}`,
	'member.invitation-revoked': (p) => `Invitation of ${p.email} taken back`,
	'member.joined': (p) => `${p.name} joined as ${roleName(p.role)}`,
	'member.role-changed': (p) => ({
		line: `Role of ${p.name} changed`,
		details: [{ label: 'role', from: roleName(p.from), to: roleName(p.to) }]
	}),
	'member.removed': (p) => `${p.name} (${roleName(p.role)}) taken out of the group`,
	'token.created': (p) =>
		`API token “${p.name}” made (${p.scopes.join(', ')}), until ${p.expiresAt.slice(0, 10)}`,
	'token.revoked': (p) => `API token “${p.name}” revoked`,
	'mail.tried-again': (p) => `Mail “${p.subject}” queued again`,
	'audit.verified': (p) =>
		p.firstBad
			? `Trail checked: the first bad entry is ${p.firstBad.seq}`
			: `Trail checked: ${p.entries} entries, last hash ${short(p.lastHash)}`,
	'audit.exported': (p) => `${p.entries} entries of the trail exported`,
	'setting.changed': (p) => ({ line: 'Site settings changed', details: differences(p.from, p.to) }),

	'study.created': (p) => `Study “${p.name}” begun; to decide: ${p.decision}`,
	'study.changed': (p) => ({ line: 'Study changed', details: changesOf(p.changes) }),
	'study.archived': () => 'Study archived',
	'scheme.created': (p) => `Scheme “${p.name}” begun`,
	'scheme.version-saved': (p) => `Scheme version ${p.number} saved: ${p.summary}`,
	'scheme.renamed': (p) => ({
		line: 'Scheme renamed',
		details: [{ label: 'name', from: p.from, to: p.to }]
	}),
	'sheet.received': (p) => `Sheet ${p.fileName} received (${kilobytes(p.size)}, SHA-256 ${short(p.sha256)}…)`,
	'sheet.refused': (p) => `Sheet ${p.fileName} refused (${p.code})`,
	'sheet.downloaded': (p) => `Sheet ${p.fileName} downloaded as received`,
	'run.created': (p) => `Run ${p.number} “${p.name}” made`,
	'run.revised': (p) => ({
		line: `Run ${p.number} revised (revision ${p.revision})`,
		details: changesOf(p.changes)
	}),
	'run.point-excluded': (p) =>
		`Run ${p.number}: timepoint ${p.index + 1}${channelOf(p.channel)} excluded (${p.reasonCode})`,
	'run.point-restored': (p) => `Run ${p.number}: timepoint ${p.index + 1}${channelOf(p.channel)} used again`,
	'fit.started': (p) => `Fit started, seed ${p.seed}, engine ${p.engineVersion}`,
	'fit.finished': (p) =>
		`Fit ${p.number} ${p.status}: weighted sum of squares ${p.weightedSsr.toPrecision(5)} over ${p.pointsUsed} points`,
	'fit.failed': (p) => `Fit gave no result: ${p.message}`,
	'fit.cancelled': () => 'Fit cancelled',
	'fit.confirmation': (p) =>
		`Fit ${p.number} held against ${p.runName} (revision ${p.revision}): ${p.inside} of ${p.counted} values inside the ${Math.round(p.confidence * 100)} % prediction band`,
	'window.computed': (p) => `Window ${p.number} computed (${p.kind})`,
	'recipe.created': (p) => `Recipe “${p.title}” begun`,
	'recipe.version-saved': (p) => `Draft version ${p.number} saved`,
	'recipe.version-started': (p) => `Version ${p.number} begun from version ${p.from}`,
	'recipe.submitted': (p) => `Version ${p.number} submitted for review`,
	'recipe.taken-back': (p) => `Version ${p.number} taken back from review`,
	'recipe.returned': (p) => `Version ${p.number} returned: ${p.comment}`,
	'recipe.commented': (p) => `Comment on version ${p.number}: ${p.comment}`,
	'recipe.signed': (p) =>
		`Version ${p.number} signed “${p.meaning}” by ${p.printedName}, content ${short(p.contentHash)}…`,
	'recipe.signing-failed': (p) => `Signing version ${p.number} was refused: ${p.why}`,
	'recipe.superseded': (p) => `Version ${p.number} superseded by version ${p.by}`,
	'recipe.withdrawn': (p) => `Version ${p.number} withdrawn`,
	'recipe.shared': (p) => `Version ${p.number} shared with ${p.withGroupName}`,
	'recipe.share-ended': (p) => `Version ${p.number} no longer shared with ${p.withGroupName}`,
	'recipe.caution-read': (p) => `Caution ${p.cautionKey} of version ${p.number} read`,
	'recipe.read': (p) => `Version ${p.number} opened`,
	'workbook.exported': (p) => `Workbook of version ${p.number} exported (SHA-256 ${short(p.sha256)}…)`
};

const KINDS = new Set(Object.keys(AUDIT_EVENTS));

/** 'scheme.version-saved' in plain letters, for a kind that has no sentence of its own. */
const plainKind = (type: string): string => {
	const words = type.replace(/[.-]/g, ' ');
	return words.charAt(0).toUpperCase() + words.slice(1);
};

/** An entry in words. One whose content does not have its kind's form is named as such, not hidden. */
export function describe(type: string, payload: string): Described {
	if (!KINDS.has(type)) return { line: `${plainKind(type)} (unknown kind of entry)`, details: [] };
	let value: unknown;
	try {
		value = JSON.parse(payload);
	} catch {
		return { line: `${plainKind(type)} (content cannot be read)`, details: [] };
	}
	const parsed = AUDIT_EVENTS[type as AuditType].safeParse(value);
	if (!parsed.success) return { line: `${plainKind(type)} (content is not as written)`, details: [] };
	const writer = WRITERS[type as AuditType];
	const told = writer ? writer(parsed.data as never) : plainKind(type);
	return typeof told === 'string' ? { line: told, details: [] } : told;
}

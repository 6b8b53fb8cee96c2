import { AuditEvent, type AuditEvent as Row } from '../database/models';
import type { Tx } from '../database';
import { roleIn, type Actor } from '../policy';
import { canonicalJson, sha256 } from './canonical';
import { AUDIT_EVENTS, type AuditEntry } from './events';

/** Hash before the first entry. */
export const GENESIS = '0'.repeat(64);

export type HashedFields = Omit<Row['dataValues'], 'hash'>;

/** The hash covers every column but itself, so that no field can be changed unseen. */
export function entryHash(fields: HashedFields): string {
	return sha256(
		canonicalJson({
			seq: fields.seq,
			at: fields.at,
			userId: fields.userId ?? null,
			printedName: fields.printedName,
			role: fields.role ?? null,
			source: fields.source,
			groupId: fields.groupId ?? null,
			studyId: fields.studyId ?? null,
			objectType: fields.objectType,
			objectId: fields.objectId ?? null,
			objectVersion: fields.objectVersion ?? null,
			type: fields.type,
			payload: fields.payload,
			reason: fields.reason ?? null,
			prevHash: fields.prevHash
		})
	);
}

/** What the trail needs to know of who acted; use SYSTEM for the service itself. */
export type AuditActor = Pick<Actor, 'name' | 'source' | 'memberships' | 'siteAdmin'> & {
	userId: string | null;
};
export const SYSTEM: AuditActor = {
	userId: null,
	name: 'Ratewright',
	source: 'system',
	memberships: [],
	siteAdmin: false
};

/** Writes one entry to the end of the chain, in the transaction of the change that it tells of. */
export async function appendAudit(tx: Tx, actor: AuditActor, entry: AuditEntry): Promise<void> {
	const payload = AUDIT_EVENTS[entry.type].parse(entry.payload);
	const last = await AuditEvent.findOne({ order: [['seq', 'DESC']], transaction: tx });
	const role = entry.groupId ? roleIn(actor as Actor, entry.groupId) : null;
	const fields: HashedFields = {
		seq: (last?.seq ?? 0) + 1,
		at: new Date().toISOString(),
		userId: actor.userId,
		printedName: actor.name,
		role: role ?? (actor.siteAdmin ? 'site_admin' : null),
		source: actor.source,
		groupId: entry.groupId ?? null,
		studyId: entry.studyId ?? null,
		objectType: entry.objectType,
		objectId: entry.objectId ?? null,
		objectVersion: entry.objectVersion ?? null,
		type: entry.type,
		payload: canonicalJson(payload),
		reason: entry.reason ?? null,
		prevHash: last?.hash ?? GENESIS
	};
	await AuditEvent.create({ ...fields, hash: entryHash(fields) }, { transaction: tx });
}

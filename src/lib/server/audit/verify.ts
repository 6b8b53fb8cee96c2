import { Op } from 'sequelize';
import { AuditEvent } from '../database/models';
import { write } from '../database';
import { notAllowed } from '../errors';
import { groupsWhere, type Actor } from '../policy';
import { appendAudit, entryHash, GENESIS } from './append';
import { AUDIT_EVENTS, type AuditType } from './events';

/*
 * The trail is a chain: each entry's hash covers all of its fields and the hash of the entry before. Going along it
 * from the first entry shows the first place where a field was altered, an entry taken out or one slipped in.
 * An end cut off cannot show in the chain itself; it does against the number and last hash of an earlier check,
 * which is why each check writes both to the trail and a person can note them.
 */

export interface BadEntry {
	seq: number;
	why: string;
}

export interface TrailCheck {
	entries: number;
	firstAt: string | null;
	lastAt: string | null;
	lastHash: string;
	firstBad: BadEntry | null;
	checkedAt: string;
}

const PAGE = 1000;

function parses(type: string, payload: string): boolean {
	if (!(type in AUDIT_EVENTS)) return false;
	try {
		return AUDIT_EVENTS[type as AuditType].safeParse(JSON.parse(payload)).success;
	} catch {
		return false;
	}
}

/** What is wrong with one entry, given the one before it; null when it fits. */
export function faultOf(row: AuditEvent, before: { seq: number; hash: string }): string | null {
	if (row.seq !== before.seq + 1)
		return `Entry ${before.seq + 1} is missing: entry ${row.seq} follows entry ${before.seq}.`;
	if (row.prevHash !== before.hash) return 'It does not continue the entry before it.';
	if (entryHash(row.get({ plain: true })) !== row.hash)
		return 'Its content was changed after it was written.';
	if (!parses(row.type, row.payload)) return 'Its content has not the form of an entry of its kind.';
	return null;
}

/** Goes along the whole chain, page by page, and stops at the first entry that does not fit. */
export async function checkTrail(): Promise<TrailCheck> {
	let last = { seq: 0, hash: GENESIS };
	let firstAt: string | null = null;
	let lastAt: string | null = null;
	let firstBad: BadEntry | null = null;
	for (;;) {
		const rows = await AuditEvent.findAll({
			where: { seq: { [Op.gt]: last.seq } },
			order: [['seq', 'ASC']],
			limit: PAGE
		});
		for (const row of rows) {
			const why = faultOf(row, last);
			if (why) {
				firstBad = { seq: row.seq, why };
				break;
			}
			firstAt ??= row.at;
			lastAt = row.at;
			last = { seq: row.seq, hash: row.hash };
		}
		if (firstBad || rows.length < PAGE) break;
	}
	return {
		entries: last.seq,
		firstAt,
		lastAt,
		lastHash: last.hash,
		firstBad,
		checkedAt: new Date().toISOString()
	};
}

/** QA reviewers and group leads check the trail, and site admins, who learn nothing of its content by it. */
export async function verifyTrail(actor: Actor): Promise<TrailCheck> {
	const admin = actor.siteAdmin && !actor.scopes;
	if (!admin && groupsWhere(actor, 'audit.verify').length === 0)
		throw notAllowed('The audit trail is checked by QA reviewers and group leads.');
	const result = await checkTrail();
	await write((tx) =>
		appendAudit(tx, actor, {
			type: 'audit.verified',
			objectType: 'audit',
			payload: { entries: result.entries, lastHash: result.lastHash, firstBad: result.firstBad }
		})
	);
	return result;
}

import Papa from 'papaparse';
import { write } from '../database';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { appendAudit } from './append';
import { canonicalJson } from './canonical';
import { listAudit, type AuditFilter, type AuditLine } from './read';

const MOST_ENTRIES = 50_000;
const STEP = 500;
/** The library's own pattern overlooks text of several lines. */
const LIKE_A_FORMULA = /^[=+\-@\t\r\n]/;

function row(line: AuditLine): Record<string, string | number> {
	return {
		entry: line.seq,
		'time (UTC)': line.at,
		person: line.printedName,
		'person id': line.userId ?? '',
		role: line.role ?? '',
		source: line.source,
		group: line.groupName ?? '',
		study: line.studyName ?? '',
		object: line.objectType,
		'object id': line.objectId ?? '',
		version: line.objectVersion ?? '',
		kind: line.type,
		'what happened': line.line,
		'from and to': line.details
			.map((d) => `${d.label}: ${d.from ?? '(nothing)'} to ${d.to ?? '(nothing)'}`)
			.join('; '),
		reason: line.reason ?? '',
		content: canonicalJson(line.payload),
		'hash before': line.prevHash,
		hash: line.hash
	};
}

/** The filtered trail as CSV, oldest entry first; text that a spreadsheet would take for a formula arrives inert. */
export async function exportAuditCsv(
	actor: Actor,
	filter: AuditFilter
): Promise<{ csv: string; entries: number }> {
	const lines: AuditLine[] = [];
	let before: number | undefined;
	for (;;) {
		const page = await listAudit(actor, { filter, before, limit: STEP });
		if (page.total > MOST_ENTRIES)
			throw new AppError(
				'too-large',
				`These are ${page.total} entries; a file holds at most ${MOST_ENTRIES}. Narrow the dates and export in parts.`
			);
		lines.push(...page.items);
		if (page.next === null) break;
		before = page.next;
	}
	await write((tx) =>
		appendAudit(tx, actor, {
			type: 'audit.exported',
			groupId: filter.group ?? null,
			objectType: 'audit',
			payload: { entries: lines.length, filter: { ...filter } }
		})
	);
	const csv = Papa.unparse(lines.reverse().map(row), { escapeFormulae: LIKE_A_FORMULA, newline: '\r\n' });
	// The mark at the beginning makes spreadsheet programs read it as UTF-8.
	return { csv: `\uFEFF${csv}\r\n`, entries: lines.length };
}

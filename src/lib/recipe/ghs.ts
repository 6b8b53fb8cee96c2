import { GHS_STATEMENTS } from './ghs-statements';
import type { GhsStatement } from './ghs-types';

export { GHS_STATEMENTS };
export type { GhsStatement };

const byCode = new Map(GHS_STATEMENTS.map((s) => [s.code, s]));

/** By code. Case matters in some codes (H350i, H360Fd), so the exact one comes first. */
export function ghsStatement(code: string): GhsStatement | null {
	const given = code.replace(/\s+/g, '');
	return byCode.get(given) ?? byCode.get(given.toUpperCase()) ?? null;
}

/**
 * Statements whose code begins with, or whose text contains, every word asked for.
 * Codes come first, in the order of the list; at most `limit`.
 */
export function findStatements(query: string, limit = 20): GhsStatement[] {
	const words = query.toLowerCase().split(/\s+/).filter(Boolean);
	if (words.length === 0) return [];
	const code = words.join('').toUpperCase();
	const hasCode = (s: GhsStatement) => s.code.toUpperCase().startsWith(code);
	const starts = GHS_STATEMENTS.filter(hasCode);
	const contains = GHS_STATEMENTS.filter(
		(s) => !hasCode(s) && words.every((w) => s.text.toLowerCase().includes(w))
	);
	return [...starts, ...contains].slice(0, limit);
}

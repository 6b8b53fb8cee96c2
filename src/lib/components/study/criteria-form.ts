import { CRITERION_UNITS } from '$lib/schemas/criterion';

/** One row of the form, as typed. */
export interface CriterionRow {
	species: string;
	relation: string;
	limit: string;
	unit: string;
	note: string;
}

export const emptyRow = (): CriterionRow => ({
	species: '',
	relation: 'NMT',
	limit: '',
	unit: CRITERION_UNITS[1],
	note: ''
});

const FIELDS = ['species', 'relation', 'limit', 'unit', 'note'] as const;

/** Rows as the form posts them: criteria.0.species, criteria.0.limit … */
export function rowsOf(form: FormData): CriterionRow[] {
	const rows = new Map<number, CriterionRow>();
	for (const [key, value] of form) {
		const match = /^criteria\.(\d{1,3})\.(\w+)$/.exec(key);
		const field = FIELDS.find((f) => f === match?.[2]);
		if (!match || !field || typeof value !== 'string') continue;
		const at = Number(match[1]);
		const row = rows.get(at) ?? emptyRow();
		row[field] = value.trim();
		rows.set(at, row);
	}
	return [...rows].sort(([a], [b]) => a - b).map(([, row]) => row);
}

/** A row in which nothing was entered is no criterion. */
export const isEmptyRow = (row: CriterionRow): boolean =>
	row.species === '' && row.limit === '' && row.note === '';

/** What the schema is to check; a limit that is no number is left for it to name. */
export const toCriterion = (row: CriterionRow): unknown => ({
	species: row.species,
	relation: row.relation,
	limit: row.limit === '' ? undefined : Number(row.limit.replace(',', '#')),
	unit: row.unit,
	...(row.note ? { note: row.note } : {})
});

/** First message by field path ("criteria.0.limit"). */
export function messagesOf(
	issues: readonly { path: readonly PropertyKey[]; message: string }[]
): Record<string, string> {
	const out: Record<string, string> = {};
	for (const issue of issues) out[issue.path.map(String).join('.')] ??= issue.message;
	return out;
}

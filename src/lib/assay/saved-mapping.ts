/** Mappings kept for a lab group. One is applied only where every header matches exactly, and it is named when it is. */
import type { Mapping, SavedMapping, TableProposal } from '$lib/schemas/sheet';
import { asColumns } from './orientation';

/** What is kept of a confirmed mapping: columns by their place and header, never the rows of one sheet. */
export function toSavedMapping(
	name: string,
	table: Pick<TableProposal, 'columns' | 'rows'>,
	confirmed: Mapping
): SavedMapping {
	const mapping = asColumns(confirmed);
	return {
		name,
		headers: (table.rows ?? table.columns).map((c) => c.header),
		mapping: {
			layout: mapping.layout,
			columns: mapping.columns.map(({ column: _column, ...rest }) => rest),
			...(mapping.peaks ? { peaks: mapping.peaks } : {}),
			...(mapping.densityGPerL ? { densityGPerL: mapping.densityGPerL } : {}),
			...(mapping.internalStandard ? { internalStandard: mapping.internalStandard } : {}),
			...(mapping.timeZone ? { timeZone: mapping.timeZone } : {}),
			...(mapping.replicates ? { replicates: mapping.replicates } : {}),
			...(mapping.columnReplicates ? { columnReplicates: mapping.columnReplicates } : {}),
			...(mapping.across ? { across: true } : {})
		}
	};
}

export function savedFor(
	saved: SavedMapping[],
	headers: string[],
	across: boolean
): SavedMapping | undefined {
	if (headers.every((h) => h === '')) return undefined;
	return saved.find(
		(s) =>
			(s.mapping.across ?? false) === across &&
			s.headers.length === headers.length &&
			s.headers.every((h, i) => h === headers[i])
	);
}

/** The mapping, in columns, with what was kept. */
export function withSaved(mapping: Mapping, saved: SavedMapping): Mapping {
	const { columns, peaks, across: _across, ...rest } = saved.mapping;
	const known = new Map((peaks ?? []).map((p) => [p.peak, p]));
	return {
		...mapping,
		...rest,
		columns: mapping.columns.map((c, i) => (columns[i] ? { ...columns[i], column: c.column } : c)),
		...(mapping.peaks ? { peaks: mapping.peaks.map((p) => known.get(p.peak) ?? p) } : {})
	};
}

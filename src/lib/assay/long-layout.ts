/** The long layout, one row a peak: a column of names that come again and again, and a column of values. */
import type { SpeciesContent } from '$lib/schemas/scheme';
import type { ColumnProposal, Mapping, PeakMapping, TableProposal } from '$lib/schemas/sheet';
import { type ColumnFacts, type ColumnHeader, matchName } from './columns';
import type { SheetView } from './grid';
import type { FoundTable } from './tables';
import { isPeakValueWord, isPeakWord } from './words';

interface Long {
	peak: number;
	value: number;
}

/** One row a peak: a column of names that come again and again, and a column of values. */
export function longLayout(
	headers: ColumnHeader[],
	facts: Map<number, ColumnFacts>,
	columns: ColumnProposal[]
): Long | null {
	const named = (h: ColumnHeader) => h.parts.at(-1) ?? '';
	const peak = headers.find((h) => {
		const f = facts.get(h.column);
		return f && isPeakWord(named(h)) && f.texts > f.numbers && f.texts >= 4 && f.distinct * 2 <= f.texts;
	});
	if (!peak) return null;
	const values = headers.filter(
		(h) =>
			h.column !== peak.column &&
			(facts.get(h.column)?.numbers ?? 0) > 0 &&
			isPeakValueWord(named(h) || h.header)
	);
	const isTime = (h: ColumnHeader) => columns.find((c) => c.column === h.column)?.role === 'time';
	const best =
		values.find((h) => h.unit?.of === 'value' && h.unit.unit !== 'area' && !isTime(h)) ??
		values.find((h) => !isTime(h));
	return best ? { peak: peak.column, value: best.column } : null;
}

export function useLong(mapping: Mapping, columns: ColumnProposal[], long: Long): void {
	for (const c of mapping.columns) {
		if (c.column === long.peak) Object.assign(c, { role: 'peak', unit: null, weights: undefined });
		else if (c.column === long.value) Object.assign(c, { role: 'value', weights: undefined });
		else if (c.role === 'species') Object.assign(c, { role: 'ignore', weights: undefined });
	}
	for (const c of mapping.columns) if (c.weights === undefined) delete c.weights;
	columns.forEach((c, i) => (c.role = mapping.columns[i].role));
}

const MOST_PEAKS = 200;

export function peaksOf(
	view: SheetView,
	found: FoundTable,
	column: number,
	species: SpeciesContent[]
): PeakMapping[] {
	const peaks = new Map<string, PeakMapping>();
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		if (peaks.size >= MOST_PEAKS) break;
		const peak = view.text(r, column).slice(0, 120);
		if (!peak || peaks.has(peak)) continue;
		const id = matchName(peak, species);
		peaks.set(peak, { peak, ...(id ? { weights: { [id]: 1 } } : {}) });
	}
	return [...peaks.values()];
}

export function peakCounts(
	view: SheetView,
	found: FoundTable,
	column: number,
	peaks: PeakMapping[]
): TableProposal['peaks'] {
	const counts = new Map<string, number>();
	for (const r of view.filledRows(found.block.firstRow, found.block.lastRow)) {
		const peak = view.text(r, column).slice(0, 120);
		counts.set(peak, (counts.get(peak) ?? 0) + 1);
	}
	return peaks.map((p) => ({
		peak: p.peak,
		values: counts.get(p.peak) ?? 0,
		species: Object.keys(p.weights ?? {})[0] ?? null
	}));
}

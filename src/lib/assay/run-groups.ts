/** Several runs under super-headers that share one time column: "Run 1 (40 °C)" over A and B, "Run 2 (60 °C)" over A and B again (B28). */
import type { SpeciesContent } from '$lib/schemas/scheme';
import { type ColumnHeader, matchSpecies, readHeaders } from './columns';
import { type FoundTable, viewOfTable } from './tables';
import type { GridWorkbook } from '$lib/schemas/sheet';
import { splitHeader } from './units';

/** The table for each of its runs, or as it is where it holds one; a label over the whole table becomes its title. */
export function byRun(workbook: GridWorkbook, species: SpeciesContent[], found: FoundTable): FoundTable[] {
	const view = viewOfTable(workbook, found);
	if (!view) return [found];
	const headers = readHeaders(view, found.headerRows, found.block);
	const groups = new Map<string, ColumnHeader[]>();
	for (const h of headers) {
		const label = labelOf(h);
		if (label) groups.set(label, [...(groups.get(label) ?? []), h]);
	}
	const labels = [...groups.keys()];
	if (labels.length === 1 && groups.get(labels[0])?.length === headers.filter((h) => h.header).length)
		return [{ ...found, title: labels[0].slice(0, 120) }];
	if (labels.length < 2 || !repeats([...groups.values()], species)) return [found];
	return labels.map((label) => ({
		...found,
		title: label.slice(0, 120),
		only: new Set((groups.get(label) ?? []).map((h) => h.column))
	}));
}

/** The topmost of several header texts, unless it says what was measured. */
function labelOf(h: ColumnHeader): string | null {
	const parts = h.header.split(' / ');
	if (parts.length < 2 || !h.carried) return null;
	const { unit } = splitHeader(parts[0]);
	return unit === null || unit.of === 'temperature' ? parts[0] : null;
}

/** True when one species in one unit stands under more than one label. */
function repeats(groups: ColumnHeader[][], species: SpeciesContent[]): boolean {
	const seen = new Set<string>();
	for (const group of groups) {
		const own = new Set(
			group.flatMap((h) => {
				const id = matchSpecies(h, species);
				return id ? [`${id} ${h.unit?.of === 'value' ? h.unit.unit : ''}`] : [];
			})
		);
		for (const key of own) {
			if (seen.has(key)) return true;
		}
		own.forEach((key) => seen.add(key));
	}
	return false;
}

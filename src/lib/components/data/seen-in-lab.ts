/** A time unit that a person chose is worth one look at what it would mean: half-life and duration in plain words. */
import type { Mapping, Settlement, TableProposal } from '$lib/schemas/sheet';

const timeUnitOf = (mapping: Mapping | undefined): string | null =>
	mapping?.columns.find((c) => c.role === 'time')?.unit ?? null;

/** The sentence to be confirmed; null where the sheet itself states the unit. */
export function sentenceToConfirm(
	table: TableProposal | null,
	mapping: Mapping | undefined,
	settlement: Settlement | null
): string | null {
	if (!settlement || settlement.plausibility.length === 0) return null;
	const answered = settlement.findings.some(
		(f) => f.answer && ['min', 'h', 'd', 's'].includes(f.answer.key) && f.options.some((o) => o.key === 'min')
	);
	const chosen = timeUnitOf(mapping) !== timeUnitOf(table?.mapping) && timeUnitOf(mapping) !== null;
	return answered || chosen ? settlement.plausibility.join(' ').slice(0, 300) : null;
}

/** A time unit that a person chose is worth one look at what it would mean: half-life and duration in plain words. */
import { type Mapping, type Settlement, TIME_UNITS, type TableProposal } from '$lib/schemas/sheet';
import { asColumns } from './orientation';

const timeUnitOf = (mapping: Mapping | undefined): string | null =>
	(mapping && asColumns(mapping).columns.find((c) => c.role === 'time')?.unit) ?? null;

/** The sentence to be confirmed as seen in the lab; null where the sheet itself states the unit. */
export function sentenceToConfirm(
	table: Pick<TableProposal, 'mapping'> | null,
	mapping: Mapping | undefined,
	settlement: Pick<Settlement, 'plausibility' | 'findings'> | null
): string | null {
	if (!settlement || settlement.plausibility.length === 0) return null;
	const isUnit = (key: string) => (TIME_UNITS as readonly string[]).includes(key);
	const answered = settlement.findings.some(
		(f) => f.answer && isUnit(f.answer.key) && f.options.some((o) => o.key === 'min')
	);
	const unit = timeUnitOf(mapping);
	const chosen = unit !== null && unit !== timeUnitOf(table?.mapping);
	return answered || chosen ? settlement.plausibility.join(' ').slice(0, 300) : null;
}

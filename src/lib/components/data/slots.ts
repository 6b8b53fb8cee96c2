import { seriesOf } from '$lib/components/charts/series';
import type { SchemeContent } from '$lib/schemas/scheme';

/** Slot in the series table of every species that the study's schemes name; the first scheme's choice counts. */
export function slotsOf(schemes: SchemeContent[]): Record<string, number> {
	const slots: Record<string, number> = {};
	for (const scheme of schemes)
		scheme.species.forEach((species, i) => {
			slots[species.id] ??= seriesOf(species, i);
		});
	return slots;
}

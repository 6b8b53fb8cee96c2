/** What lies in which drop place while chips are moved; the content changes only when a chip is let go. */
import type { SchemeContent } from '$lib/schemas/scheme';
import type { Place, Side } from './draft';

export interface Chip {
	id: string;
	species: string;
	coefficient: number;
}

export const TRAY = 'tray';
export type Zones = Record<string, Chip[]>;

export const zoneId = (place: Place): string => `${place.stepId ?? 'new'}|${place.side}`;

export function placeOf(zone: string): Place | null {
	if (zone === TRAY) return null;
	const [stepId, side] = zone.split('|');
	return { stepId: stepId === 'new' ? null : stepId, side: side as Side };
}

/** "reactant of step 2", "product of a new step". */
export function placeWords(content: SchemeContent, zone: string): string {
	const place = placeOf(zone);
	if (!place) return 'the tray';
	const n = content.steps.findIndex((s) => s.id === place.stepId) + 1;
	return `${place.side} of ${n ? `step ${n}` : 'a new step'}`;
}

let serial = 0;

/** Every zone filled from the content. Ids are new each time, so that nothing of an ended drag is mistaken for a chip. */
export function zonesOf(content: SchemeContent): Zones {
	const run = ++serial;
	const chip = (zone: string, species: string, coefficient = 1): Chip => ({
		id: `${run}:${zone}:${species}`,
		species,
		coefficient
	});
	const zones: Zones = {
		[TRAY]: content.species.map((s) => chip(TRAY, s.id)),
		'new|reactant': [],
		'new|product': []
	};
	for (const step of content.steps) {
		const reactant = zoneId({ stepId: step.id, side: 'reactant' });
		const product = zoneId({ stepId: step.id, side: 'product' });
		zones[reactant] = step.reactant ? [chip(reactant, step.reactant)] : [];
		zones[product] = step.products.map((p) => chip(product, p.species, p.coefficient));
	}
	return zones;
}

/** What of a content the board shows: as long as it is the same, the chips stay. */
export const boardKey = (content: SchemeContent): string =>
	JSON.stringify([
		content.species.map((s) => [s.id, s.series]),
		content.steps.map((s) => [s.id, s.reactant, s.products.map((p) => [p.species, p.coefficient])])
	]);

/** Zone that holds the chip with this id. */
export const zoneHolding = (zones: Zones, id: string): string | undefined =>
	Object.keys(zones).find((z) => zones[z].some((c) => c.id === id));

import type { SpeciesContent } from '$lib/schemas/scheme';
import { savedMappingSchema, type SavedMapping } from '$lib/schemas/sheet';
import { Mapping } from '../database/models';
import { massBalancePercentOf } from '../people/group-limits';
import { schemesOf } from '../studies/read-study';
import type { Surroundings } from './examine-here';

/** Species of a study's schemes, each once; the first scheme's words count. */
export async function speciesOf(studyId: string): Promise<SpeciesContent[]> {
	const schemes = await schemesOf(studyId);
	const species = new Map<string, SpeciesContent>();
	for (const scheme of schemes)
		for (const one of scheme.content.species) {
			const known = species.get(one.id);
			// A later scheme may know what the first left open, such as the molar mass.
			species.set(one.id, known ? { ...one, ...known, name: known.name || one.name } : one);
		}
	return [...species.values()];
}

export async function savedMappings(groupId: string): Promise<SavedMapping[]> {
	const rows = await Mapping.findAll({ where: { groupId }, order: [['updatedAt', 'DESC']], limit: 500 });
	return rows.flatMap((row) => {
		const read = savedMappingSchema.safeParse(row.content);
		return read.success ? [read.data] : [];
	});
}

export async function surroundingsOf(studyId: string, groupId: string): Promise<Surroundings> {
	const [species, saved, gap] = await Promise.all([
		speciesOf(studyId),
		savedMappings(groupId),
		massBalancePercentOf(groupId)
	]);
	return { species, saved, checks: { massBalanceLow: 100 - gap, massBalanceHigh: 100 + gap } };
}

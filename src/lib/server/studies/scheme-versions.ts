import { col, fn } from 'sequelize';
import type { SchemeContent } from '$lib/schemas/scheme';
import { contentHash } from '../audit/canonical';
import type { Tx } from '../database';
import { SchemeVersion } from '../database/models';

/** The newest version of each of these schemes, whatever their number of versions. */
export async function newestVersions(schemeIds: string[], tx?: Tx): Promise<Map<string, SchemeVersion>> {
	if (schemeIds.length === 0) return new Map();
	const newest = (await SchemeVersion.findAll({
		attributes: ['schemeId', [fn('MAX', col('number')), 'number']],
		where: { schemeId: schemeIds },
		group: ['schemeId'],
		raw: true,
		transaction: tx
	})) as { schemeId: string; number: number }[];
	const versions = await Promise.all(
		newest.map(({ schemeId, number }) =>
			SchemeVersion.findOne({ where: { schemeId, number }, transaction: tx })
		)
	);
	return new Map(versions.flatMap((v) => (v ? [[v.schemeId, v] as const] : [])));
}

export interface NewVersion {
	schemeId: string;
	number: number;
	content: SchemeContent;
	createdById: string;
}

export function addVersion(tx: Tx, version: NewVersion): Promise<SchemeVersion> {
	return SchemeVersion.create({ ...version, contentHash: contentHash(version.content) }, { transaction: tx });
}

/** A scheme whose tray holds the species that somebody named, and no step yet. */
export function trayOf(speciesIds: string[]): SchemeContent {
	return {
		species: [...new Set(speciesIds)].map((id, series) => ({ id, name: '', series })),
		steps: [],
		referenceTemperature: { value: 25, unit: 'degC' }
	};
}

/** The size of a scheme as the station strip shows it. */
export function sizeInWords(content: SchemeContent): string {
	const count = (n: number, one: string, many: string) => `${n} ${n === 1 ? one : many}`;
	return `${count(content.species.length, 'species', 'species')}, ${count(content.steps.length, 'step', 'steps')}`;
}

function changesIn(what: string, before: { id: string }[], after: { id: string }[]): string[] {
	const old = new Map(before.map((x) => [x.id, contentHash(x)]));
	const now = new Set(after.map((x) => x.id));
	const list = (verb: string, ids: string[]) =>
		ids.length ? [`${what} ${ids.slice(0, 6).join(', ')}${ids.length > 6 ? ' …' : ''} ${verb}`] : [];
	return [
		...list(
			'added',
			after.filter((x) => !old.has(x.id)).map((x) => x.id)
		),
		...list(
			'changed',
			after.filter((x) => old.has(x.id) && old.get(x.id) !== contentHash(x)).map((x) => x.id)
		),
		...list(
			'removed',
			before.filter((x) => !now.has(x.id)).map((x) => x.id)
		)
	];
}

/** What a version changed, in words, for the audit trail. */
export function changeInWords(before: SchemeContent, after: SchemeContent): string {
	const changes = [
		...changesIn('species', before.species, after.species),
		...changesIn('step', before.steps, after.steps),
		...(contentHash(before.referenceTemperature) === contentHash(after.referenceTemperature)
			? []
			: [`reference temperature ${after.referenceTemperature.value} ${after.referenceTemperature.unit}`])
	];
	return changes.length ? changes.join('; ') : `order changed; ${sizeInWords(after)}`;
}

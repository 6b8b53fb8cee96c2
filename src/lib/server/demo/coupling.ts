import type { CriterionContent } from '$lib/schemas/criterion';
import type { SchemeContent } from '$lib/schemas/scheme';
import { createStudy } from '../studies/create-study';
import { seedRecipe } from './recipe';
import { conditionsOf, drawScheme, fitRuns, perHour, runsOf, type Cast } from './steps';

const SCHEME: SchemeContent = {
	species: [
		{ id: 'A', name: 'QN-7', role: 'starting material', molarMassGPerMol: 187.6, series: 0 },
		{ id: 'B', name: 'QN-8', role: 'product', molarMassGPerMol: 187.6, series: 1 },
		{ id: 'C', name: 'dimer', role: 'impurity', molarMassGPerMol: 187.6, series: 2 }
	],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: perHour(1) },
			reverse: null
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 1 }],
			forward: { kRef: perHour(0.01) },
			reverse: null
		}
	],
	referenceTemperature: { value: 40, unit: 'degC' }
};

export const CRITERIA: CriterionContent[] = [
	{ species: 'A', relation: 'NMT', limit: 1, unit: '% of charge' },
	{ species: 'C', relation: 'NMT', limit: 3, unit: '% of charge' }
];

const charged = (celsius: number, molPerL: number) => conditionsOf(celsius, { A: molPerL, B: 0, C: 0 });

const SHEETS = [
	{ file: 'qn7-run1-30C.xlsx', name: 'Run 1', conditions: charged(30, 0.38) },
	{ file: 'qn7-run2-40C.xlsx', name: 'Run 2', conditions: charged(40, 0.4) },
	{ file: 'qn7-run3-50C.csv', name: 'Run 3', conditions: charged(50, 0.42) },
	{ file: 'qn7-run4-45C-confirmation.xlsx', name: 'Run 4', conditions: charged(45, 0.4) }
];

/** The finished study: scheme, four runs, a fit of three of them, a window, a recipe that is validated and shared. */
export async function seedCoupling(cast: Cast): Promise<void> {
	const { chemist, groupId } = cast;
	const study = await createStudy(chemist, {
		groupId,
		name: 'QN-7 coupling',
		decision: 'hold time at 40 °C with A at most 1.0 % and C at most 3.0 % of charge',
		criteria: CRITERIA
	});
	const schemeId = await drawScheme(chemist, study.id, SCHEME);
	const runs = await runsOf(chemist, study.id, SHEETS);
	const fitId = await fitRuns(chemist, {
		studyId: study.id,
		schemeId,
		runIds: runs.slice(0, 3).map((run) => run.id)
	});
	await seedRecipe(cast, { studyId: study.id, fitId, confirmationRunId: runs[3].id });
}

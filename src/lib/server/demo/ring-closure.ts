import type { Conditions } from '$lib/schemas/sheet';
import type { SchemeContent } from '$lib/schemas/scheme';
import type { Actor } from '../policy';
import { createStudy } from '../studies/create-study';
import { readStudy } from '../studies/read-study';
import { saveScheme } from '../studies/save-scheme';
import { seedRecipe } from './recipe';
import { fitRuns, sheetToRun } from './steps';

const perHour = (value: number) => ({ value, unit: '1/h' });

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
			forward: { kRef: perHour(0.8) },
			reverse: null
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 1 }],
			forward: { kRef: perHour(0.3) },
			reverse: { kRef: perHour(0.1) }
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' }
};

const conditions = (celsius: number, molPerL: number): Conditions => ({
	temperature: { value: celsius, unit: 'degC' },
	initial: {
		A: { value: molPerL, unit: 'mol/L' },
		B: { value: 0, unit: 'mol/L' },
		C: { value: 0, unit: 'mol/L' }
	},
	excess: {},
	timeZero: 'end of addition'
});

const SHEETS = [
	{ file: 'hx14-run1-40C.xlsx', name: 'Run 1', conditions: conditions(40, 0.45) },
	{ file: 'hx14-run2-50C.csv', name: 'Run 2', conditions: conditions(50, 0.5) },
	{ file: 'hx14-run3-60C.csv', name: 'Run 3', conditions: conditions(60, 0.55) },
	{ file: 'hx14-run4-45C-confirmation.xlsx', name: 'Run 4', conditions: conditions(45, 0.5) }
];

export interface Cast {
	chemist: Actor;
	lead: Actor;
	groupId: string;
	/** Group that the finished recipe is shared with. */
	holderId: string;
}

/** The finished study: scheme, four runs, a fit of three of them, a window, a recipe that is validated and shared. */
export async function seedRingClosure(cast: Cast): Promise<void> {
	const { chemist, groupId } = cast;
	const study = await createStudy(chemist, {
		groupId,
		name: 'HX-14 ring closure',
		decision: 'hold time at 45 °C with A at most 2 % and C at least 60 % of charge',
		criteria: [
			{ species: 'A', relation: 'NMT', limit: 2, unit: '% of charge' },
			{ species: 'C', relation: 'NLT', limit: 60, unit: '% of charge' }
		]
	});
	const { schemes } = await readStudy(chemist, study.id);
	const [{ id: schemeId, version }] = schemes;
	await saveScheme(chemist, { schemeId, version, content: SCHEME });
	const runs = [];
	for (const sheet of SHEETS) runs.push(await sheetToRun(chemist, study.id, sheet));
	const fitId = await fitRuns(chemist, {
		studyId: study.id,
		schemeId,
		runIds: runs.slice(0, 3).map((run) => run.id)
	});
	await seedRecipe(cast, { studyId: study.id, fitId, confirmationRunId: runs[3].id });
}

import type { SchemeContent, StepContent } from '$lib/schemas/scheme';
import { createScheme } from '../studies/create-scheme';
import { createStudy } from '../studies/create-study';
import { conditionsOf, drawScheme, fitRuns, perHour, runsOf, uploadExample, type Cast } from './steps';

function scheme(secondStep: Pick<StepContent, 'reverse'>): SchemeContent {
	return {
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
				forward: { kRef: perHour(0.794) },
				reverse: null
			},
			{
				id: 's2',
				reactant: 'B',
				products: [{ species: 'C', coefficient: 1 }],
				forward: { kRef: perHour(0.297) },
				...secondStep
			}
		],
		referenceTemperature: { value: 50, unit: 'degC' }
	};
}

const charged = (celsius: number, molPerL: number) => conditionsOf(celsius, { A: molPerL, B: 0, C: 0 });

const SHEETS = [
	{ file: 'hx14-run1-40C.xlsx', name: 'Run 1', conditions: charged(40, 0.45) },
	{ file: 'hx14-run2-50C.csv', name: 'Run 2', conditions: charged(50, 0.5) },
	{ file: 'hx14-run3-60C.csv', name: 'Run 3', conditions: charged(60, 0.55) }
];

/** The study in work: two rival schemes fitted to the same runs, and a sheet whose questions are still open. */
export async function seedRingClosure({ chemist, groupId }: Cast): Promise<void> {
	const study = await createStudy(chemist, {
		groupId,
		name: 'HX-14 ring closure',
		decision: 'whether the second step runs back, and when B is at its most at 50 °C',
		criteria: [{ species: 'B', relation: 'NLT', limit: 55, unit: '% of charge' }]
	});
	const reversible = await drawScheme(chemist, study.id, scheme({ reverse: { kRef: perHour(0.0952) } }));
	const oneWay = await createScheme(chemist, {
		studyId: study.id,
		name: 'One way',
		content: scheme({ reverse: null })
	});
	const runIds = (await runsOf(chemist, study.id, SHEETS)).map((run) => run.id);
	for (const schemeId of [oneWay.id, reversible])
		await fitRuns(chemist, { studyId: study.id, schemeId, runIds });
	await uploadExample(chemist, study.id, 'hx14-run5-55C-open-questions.xlsx');
}

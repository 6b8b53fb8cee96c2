import type { CriterionContent } from '../../../src/lib/schemas/criterion';
import type { RunContent } from '../../../src/lib/schemas/run';
import type { SchemeContent } from '../../../src/lib/schemas/scheme';
import { write } from '../../../src/lib/server/database';
import { registerFits } from '../../../src/lib/server/fits/fit-job';
import type { Actor } from '../../../src/lib/server/policy';
import { addRun } from '../../../src/lib/server/runs/create-run';
import { createScheme } from '../../../src/lib/server/studies/create-scheme';
import { createStudy } from '../../../src/lib/server/studies/create-study';
import { findStudy } from '../../../src/lib/server/studies/find';

/** A → B ⇌ C with starting values near those of the invented compound HX-14. */
export const CHAIN: SchemeContent = {
	species: [
		{ id: 'A', name: 'HX-14', molarMassGPerMol: 214.2, role: 'starting material' },
		{ id: 'B', name: 'HX-14b', molarMassGPerMol: 214.2, role: 'intermediate' },
		{ id: 'C', name: 'lactone', molarMassGPerMol: 214.2, role: 'product' }
	],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: { value: 0.5, unit: '1/h' } },
			reverse: null
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 1 }],
			forward: { kRef: { value: 0.5, unit: '1/h' } },
			reverse: { kRef: { value: 0.2, unit: '1/h' } }
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' }
};

/** The rows of tests/fixtures/s01_clean_50C.csv (invented compound). */
const ROWS: [number, number, number, number][] = [
	[0, 0.5, 0, 0],
	[0.25, 0.401, 0.078, 0.007],
	[0.5, 0.337, 0.145, 0.009],
	[1, 0.225, 0.231, 0.052],
	[1.5, 0.151, 0.276, 0.077],
	[2, 0.099, 0.285, 0.112],
	[3, 0.047, 0.269, 0.185],
	[4, 0.023, 0.244, 0.236],
	[6, 0.005, 0.188, 0.306],
	[8, 0, 0.151, 0.347],
	[12, 0, 0.129, 0.377],
	[24, 0, 0.124, 0.38]
];

export const RUN_50C: RunContent = {
	temperature: { value: 50, unit: 'degC' },
	initial: {
		A: { value: 0.5, unit: 'mol/L' },
		B: { value: 0, unit: 'mol/L' },
		C: { value: 0, unit: 'mol/L' }
	},
	excess: {},
	timeUnit: 'h',
	channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
	timepoints: ROWS.map(([time, A, B, C], i) => ({
		time,
		values: { A, B, C },
		source: { sheet: 'sheet', row: i + 2, cells: { A: `B${i + 2}`, B: `C${i + 2}`, C: `D${i + 2}` } }
	}))
};

export interface WorkOverrides {
	name?: string;
	scheme?: SchemeContent;
	runs?: RunContent[];
	criteria?: CriterionContent[];
}

/** A study with a scheme and runs, made by the same use cases as the pages use. */
export async function makeWork(
	actor: Actor,
	groupId: string,
	overrides: WorkOverrides = {}
): Promise<{ studyId: string; schemeId: string; runIds: string[] }> {
	const study = await createStudy(actor, {
		groupId,
		name: overrides.name ?? 'HX-14 ring closure',
		decision: 'hold time at 50 °C',
		criteria: overrides.criteria ?? []
	});
	const scheme = await createScheme(actor, {
		studyId: study.id,
		name: 'Reversible',
		content: overrides.scheme ?? CHAIN
	});
	const runIds: string[] = [];
	for (const content of overrides.runs ?? [RUN_50C])
		runIds.push(
			await write(async (tx) => {
				const row = await findStudy(actor, study.id, 'run.write', tx);
				const made = await addRun(tx, actor, row, {
					name: '',
					content,
					sheetId: null,
					tableKey: null,
					answers: {}
				});
				return made.run.id;
			})
		);
	return { studyId: study.id, schemeId: scheme.id, runIds };
}

/** Instead of the engine: answers at once, or runs until it is called off. */
export function registerQuickFits(ms = 0): void {
	registerFits(
		() => `
const { parentPort, workerData } = require('node:worker_threads');
const flag = new Int32Array(workerData.stop);
const until = Date.now() + ${ms};
while (Date.now() < until && Atomics.load(flag, 0) === 0);
const request = workerData.task;
parentPort.postMessage({ type: 'result', result: {
	status: 'converged', message: '', parameters: [{ id: 's1.forward.kRef', estimate: 0.79, standardError: 0.007,
	ci95: [0.78, 0.8], profileCi95: null, unit: '1/h', state: 'fitted' }], fittedIds: ['s1.forward.kRef'],
	correlation: [[1]], covariance: [[1e-4]], scales: ['ln'], weightedSsr: 1e-4, residualStandardError: 0.0041,
	pointsUsed: 33, pointsCensored: 0, degreesOfFreedom: 30, aicc: -300, bic: -295, lackOfFit: null, runsTest: null,
	lag1: null, alternatives: [], residuals: [], singularValues: [1], massBalance: [], findings: [], evaluations: 1,
	optimality: 0, startsRun: 1, startsConverged: 1, engineVersion: 'stub', seed: request.options.seed,
	studied: { temperatureC: [50, 50], chargeMolPerL: { A: [0.5, 0.5] }, lastTimeH: 24 } } });
`
	);
}

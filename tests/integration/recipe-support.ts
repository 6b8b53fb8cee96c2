import { readFileSync } from 'node:fs';
import { ENGINE_VERSION } from '../../src/lib/kinetics';
import { fit } from '../../src/lib/kinetics/fit';
import { fitRequest, type FitReport, type FitRequest } from '../../src/lib/schemas/fit';
import type { RunContent } from '../../src/lib/schemas/run';
import { runContent } from '../../src/lib/schemas/run';
import type { SchemeContent } from '../../src/lib/schemas/scheme';
import { contentHash, sha256 } from '../../src/lib/server/audit/canonical';
import { write } from '../../src/lib/server/database';
import {
	Fit,
	FitRun,
	newId,
	Run,
	RunRevision,
	SchemeVersion,
	Sheet
} from '../../src/lib/server/database/models';
import type { Actor } from '../../src/lib/server/policy';
import { createStudy } from '../../src/lib/server/studies/create-study';

const csv = readFileSync(new URL('../fixtures/s01_clean_50C.csv', import.meta.url));
const rows = csv
	.toString('utf8')
	.trim()
	.split(/\r?\n/)
	.slice(1)
	.map((line) => line.split(',').map(Number));

const scheme: SchemeContent = {
	species: [
		{ id: 'A', name: 'HX-14', role: 'starting material', molarMassGPerMol: 214.2 },
		{ id: 'B', name: 'HX-14b', role: 'intermediate', molarMassGPerMol: 214.2 },
		{ id: 'C', name: 'lactone', role: 'product', molarMassGPerMol: 214.2 }
	],
	steps: [
		{
			id: 's1',
			reactant: 'A',
			products: [{ species: 'B', coefficient: 1 }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: null
		},
		{
			id: 's2',
			reactant: 'B',
			products: [{ species: 'C', coefficient: 1 }],
			forward: { kRef: { value: 1, unit: '1/h' } },
			reverse: { kRef: { value: 1, unit: '1/h' } }
		}
	],
	referenceTemperature: { value: 50, unit: 'degC' }
};

/** The invented run HX-14 at 50 °C; `shift` moves the values a little, for a run that the fit has not seen. */
export const content = (shift = 0): RunContent =>
	runContent.parse({
		temperature: { value: 50, unit: 'degC' },
		initial: { A: { value: 0.5, unit: 'mol/L' } },
		timeUnit: 'h',
		timeZero: 'end of charging A',
		channels: ['A', 'B', 'C'].map((id) => ({ id, weights: { [id]: 1 }, unit: 'mol/L' })),
		timepoints: rows.map(([time, A, B, C], i) => ({
			time,
			values: { A: time === 0 ? A : A + shift, B, C },
			source: { sheet: 's01', row: i + 2, cells: { A: `B${i + 2}`, B: `C${i + 2}`, C: `D${i + 2}` } }
		}))
	});

let stored: { request: FitRequest; report: FitReport } | undefined;
function fitted(): { request: FitRequest; report: FitReport } {
	if (stored) return stored;
	const request = fitRequest.parse({
		...scheme,
		runs: [{ ...content(), id: 'r1' }],
		options: { starts: 3, profiles: false }
	});
	return (stored = { request, report: fit(request) });
}

export interface Prepared {
	studyId: string;
	fitId: string;
	/** Not used in the fit: as the prediction says, and far from it. */
	unusedRunId: string;
	strayRunId: string;
	usedRunId: string;
	sha256: string;
}

async function addRun(
	actor: Actor,
	groupId: string,
	studyId: string,
	number: number,
	body: RunContent,
	sheetId: string | null
) {
	return write(async (tx) => {
		const run = await Run.create(
			{
				studyId,
				groupId,
				number,
				name: `HX-14 run ${number}`,
				createdById: actor.userId,
				updatedAt: new Date()
			},
			{ transaction: tx }
		);
		const revision = await RunRevision.create(
			{
				runId: run.id,
				number: 1,
				sheetId,
				content: body,
				contentHash: contentHash(body),
				createdById: actor.userId
			},
			{ transaction: tx }
		);
		await run.update({ currentRevisionId: revision.id }, { transaction: tx });
		return { runId: run.id, revisionId: revision.id };
	});
}

/** A study with one fit of the invented run HX-14 and two runs that the fit has not seen. */
export async function prepareStudy(
	actor: Actor,
	groupId: string,
	change: (report: FitReport) => FitReport = (r) => r
): Promise<Prepared> {
	const study = await createStudy(actor, {
		groupId,
		name: 'HX-14 ring closure',
		decision: 'Hold time at 50 °C with A at most 1.0 % of charge',
		criteria: [{ species: 'A', relation: 'NMT', limit: 1, unit: '% of charge' }]
	});
	const digest = sha256(csv);
	const sheet = await write((tx) =>
		Sheet.create(
			{
				studyId: study.id,
				groupId,
				fileName: 's01_clean_50C.csv',
				mediaType: 'text/csv',
				size: csv.length,
				sha256: digest,
				bytes: csv,
				uploadedById: actor.userId
			},
			{ transaction: tx }
		)
	);
	const version = await write((tx) =>
		SchemeVersion.create(
			{
				schemeId: study.schemeId,
				number: 2,
				content: scheme,
				contentHash: contentHash(scheme),
				createdById: actor.userId
			},
			{ transaction: tx }
		)
	);
	const used = await addRun(actor, groupId, study.id, 1, content(), sheet.id);
	const unused = await addRun(actor, groupId, study.id, 2, content(0.001), null);
	const stray = await addRun(actor, groupId, study.id, 3, content(0.09), null);
	const { request, report } = fitted();
	const fitId = newId();
	await write(async (tx) => {
		await Fit.create(
			{
				id: fitId,
				studyId: study.id,
				groupId,
				number: 1,
				schemeVersionId: version.id,
				request,
				inputHash: contentHash(request),
				engineVersion: ENGINE_VERSION,
				seed: report.seed,
				report: change(structuredClone(report)),
				startedAt: new Date(),
				finishedAt: new Date(),
				createdById: actor.userId
			},
			{ transaction: tx }
		);
		await FitRun.create(
			{ fitId, runId: used.runId, runRevisionId: used.revisionId, position: 0 },
			{ transaction: tx }
		);
	});
	return {
		studyId: study.id,
		fitId,
		usedRunId: used.runId,
		unusedRunId: unused.runId,
		strayRunId: stray.runId,
		sha256: digest
	};
}

/** A newer revision of a run: what rested on the old one is then based on superseded data. */
export async function reviseRun(actor: Actor, runId: string): Promise<void> {
	await write(async (tx) => {
		const body = content(0.002);
		const revision = await RunRevision.create(
			{
				runId,
				number: 2,
				sheetId: null,
				content: body,
				contentHash: contentHash(body),
				reason: 'corrected assay',
				createdById: actor.userId
			},
			{ transaction: tx }
		);
		await Run.update({ currentRevisionId: revision.id }, { where: { id: runId }, transaction: tx });
	});
}

import type { ConfirmedPrediction } from '$lib/schemas/fit-analysis';
import type { RunContent } from '$lib/schemas/run';
import { asFitted } from '$lib/schemas/temperature-log';
import { ENGINE_VERSION } from '$lib/kinetics/version';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { AuditEvent, Run, RunRevision } from '../database/models';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { currentRevisions } from '../runs/find';
import { analyseInThread, usableFit } from './analyse-fit';
import { findFitJob } from './read-fit';

/** A run that the fit did not use, held against its prediction band; on record in the audit trail. */
export interface ConfirmationRecord {
	runId: string;
	runName: string;
	revisionId: string;
	revision: number;
	inside: number;
	counted: number;
	confidence: number;
	engineVersion: string;
	by: string;
	at: string;
}

const CURVE_POINTS = 120;

function curveTimes(run: RunContent): number[] {
	const end = Math.max(0, ...run.timepoints.map((p) => p.time)) || 1;
	return Array.from({ length: CURVE_POINTS }, (_, k) => (end * k) / (CURVE_POINTS - 1));
}

function usable(run: RunContent, request: { species: { id: string }[] }): RunContent {
	const known = new Set(request.species.map((s) => s.id));
	const channels = run.channels.filter((c) => Object.keys(c.weights).every((id) => known.has(id)));
	const initial = Object.fromEntries(Object.entries(run.initial).filter(([id]) => known.has(id)));
	return { ...asFitted(run), id: undefined, channels, initial };
}

/** Holds a revision of a run against the fit. */
async function predicted(
	actor: Actor,
	fitId: string,
	content: RunContent
): Promise<ConfirmedPrediction & { run: RunContent }> {
	const { request, report } = await usableFit(actor, fitId);
	const run = usable(content, request);
	if (run.channels.length === 0)
		throw new AppError('invalid', 'This run measures nothing that the scheme of the fit has.');
	const fit = { request, report };
	const result = await analyseInThread<ConfirmedPrediction>({
		kind: 'confirmation',
		fit,
		run,
		times: curveTimes(run)
	});
	if (result.confirmation.counted === 0)
		throw new AppError(
			'invalid',
			'The run has no value after time zero that could be held against the curves.'
		);
	return { ...result, run };
}

/** Predicts an unused run, counts its values inside the 95 % prediction band and puts the count on record. */
export async function confirmFit(actor: Actor, input: { fitId: string; runId: string }): Promise<void> {
	const job = await findFitJob(actor, input.fitId, 'fit.run');
	const { record } = await usableFit(actor, input.fitId);
	const [{ run, revision }] = await currentRevisions(record.studyId, [input.runId]);
	const usedBy = (job.input as { runs: { id: string }[] }).runs;
	if (usedBy.some((r) => r.id === run.id))
		throw new AppError(
			'wrong-state',
			'The fit used this run; only a run that it did not use can confirm it.'
		);
	const { confirmation } = await predicted(actor, input.fitId, revision.content);
	const { inside, counted, confidence } = confirmation;
	await write((tx) =>
		appendAudit(tx, actor, {
			type: 'fit.confirmation',
			payload: {
				number: record.number,
				runId: run.id,
				runName: run.name,
				runRevisionId: revision.id,
				revision: revision.number,
				inside,
				counted,
				confidence,
				engineVersion: ENGINE_VERSION
			},
			groupId: record.groupId,
			studyId: record.studyId,
			objectType: 'fit',
			objectId: record.id
		})
	);
}

/** Confirmations of a fit on record, oldest first. */
export async function listConfirmations(actor: Actor, fitId: string): Promise<ConfirmationRecord[]> {
	const job = await findFitJob(actor, fitId, 'study.read');
	const entries = await AuditEvent.findAll({
		where: { objectId: job.id, type: 'fit.confirmation' },
		order: [['seq', 'ASC']]
	});
	return entries.map((entry) => {
		const { runRevisionId, ...payload } = JSON.parse(entry.payload) as ConfirmationRecord & {
			runRevisionId: string;
		};
		return { ...payload, revisionId: runRevisionId, by: entry.printedName, at: entry.at };
	});
}

/** The same prediction again, with every point and the band: for the chart. */
export async function readConfirmation(
	actor: Actor,
	input: { fitId: string; revisionId: string }
): Promise<ConfirmedPrediction & { run: RunContent }> {
	const { record } = await usableFit(actor, input.fitId);
	const revision = await RunRevision.findByPk(input.revisionId);
	const run = revision && (await Run.findByPk(revision.runId));
	if (!revision || !run || run.studyId !== record.studyId)
		throw new AppError('not-found', 'There is no such revision of a run in this study.');
	return predicted(actor, input.fitId, revision.content);
}

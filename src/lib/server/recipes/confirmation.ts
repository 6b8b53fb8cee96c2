import type { RunContent } from '$lib/schemas/run';
import { contentHash } from '../audit/canonical';
import type { Tx } from '../database';
import { Fit, FitRun, Run, RunRevision } from '../database/models';
import { AppError } from '../errors';
import { isId } from '../ids';
import { countInBand } from './prediction';

/** How the kinetics predicted a run that the fit has not seen. */
export interface Confirmation {
	runId: string;
	runNumber: number;
	runName: string;
	revisionId: string;
	revision: number;
	temperature: { value: number; unit: string };
	inside: number;
	total: number;
	/** Confidence of the prediction band. */
	level: number;
	/** Set where so few points inside would be rare if the prediction held: the signer has to say why. */
	needsComment: boolean;
}

export interface ConfirmationCandidate {
	runId: string;
	number: number;
	name: string;
	temperature: { value: number; unit: string };
}

/** P(at most `inside` of `total` points inside), if each lies inside with probability `level` on its own. */
export function probabilityOfAtMost(inside: number, total: number, level: number): number {
	let term = (1 - level) ** total;
	let sum = 0;
	for (let k = 0; k <= inside; k++) {
		sum += term;
		term *= ((total - k) / (k + 1)) * (level / (1 - level));
	}
	return Math.min(1, sum);
}

/** Runs of the study that the fit did not use, in any of their revisions. */
export async function confirmationCandidates(fit: Fit, tx?: Tx): Promise<ConfirmationCandidate[]> {
	const used = await FitRun.findAll({ where: { fitId: fit.id }, attributes: ['runId'], transaction: tx });
	const usedIds = new Set(used.map((u) => u.runId));
	const runs = await Run.findAll({
		where: { studyId: fit.studyId, archivedAt: null },
		order: [['number', 'ASC']],
		transaction: tx
	});
	const unused = runs.filter((r) => !usedIds.has(r.id) && r.currentRevisionId);
	const revisions = await RunRevision.findAll({
		where: { id: unused.map((r) => r.currentRevisionId!) },
		transaction: tx
	});
	return unused.flatMap((run) => {
		const revision = revisions.find((r) => r.id === run.currentRevisionId);
		if (!revision) return [];
		return [{ runId: run.id, number: run.number, name: run.name, temperature: revision.content.temperature }];
	});
}

const valuesOf = ({ timepoints }: RunContent): string =>
	contentHash(timepoints.map(({ time, values }) => ({ time, values })));

/** The same sheet read a second time is another run, and still no run that the fit has not seen. */
async function refuseCopy(fit: Fit, run: Run, content: RunContent, tx?: Tx): Promise<void> {
	const used = await FitRun.findAll({ where: { fitId: fit.id }, transaction: tx });
	const revisions = await RunRevision.findAll({
		where: { id: used.map((u) => u.runRevisionId) },
		transaction: tx
	});
	if (!revisions.some((r) => valuesOf(r.content) === valuesOf(content))) return;
	throw new AppError(
		'invalid',
		`Run ${run.number} has the times and values of a run that fit ${fit.number} used, so it confirms nothing. Choose another run.`
	);
}

async function unusedRun(fit: Fit, runId: string, tx?: Tx): Promise<{ run: Run; revision: RunRevision }> {
	const run = isId(runId)
		? await Run.findOne({ where: { id: runId, studyId: fit.studyId }, transaction: tx })
		: null;
	const revision = run?.currentRevisionId
		? await RunRevision.findByPk(run.currentRevisionId, { transaction: tx })
		: null;
	if (!run || !revision)
		throw new AppError('invalid', 'The confirmation run is not a run of this study. Choose another one.');
	const seen = await FitRun.findOne({ where: { fitId: fit.id, runId: run.id }, transaction: tx });
	if (seen)
		throw new AppError(
			'invalid',
			`Run ${run.number} was used in fit ${fit.number}, so it confirms nothing. Choose a run that the fit has not seen.`
		);
	await refuseCopy(fit, run, revision.content, tx);
	return { run, revision };
}

/** Counts the points of an unused run inside the 95 % prediction band of the fit. */
export async function confirm(fit: Fit, runId: string, tx?: Tx): Promise<Confirmation> {
	const { run, revision } = await unusedRun(fit, runId, tx);
	const content: RunContent = revision.content;
	const { inside, total, level } = countInBand(fit.request, fit.report, content);
	return {
		runId: run.id,
		runNumber: run.number,
		runName: run.name,
		revisionId: revision.id,
		revision: revision.number,
		temperature: content.temperature,
		inside,
		total,
		level,
		needsComment: inside === 0 || probabilityOfAtMost(inside, total, level) < 0.05
	};
}

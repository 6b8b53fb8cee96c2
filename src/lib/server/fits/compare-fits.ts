import type { Comparison } from '$lib/kinetics/fit/compare';
import { AppError, notFound } from '../errors';
import type { Actor } from '../policy';
import { findStudy } from '../studies/find';
import { analyseInThread } from './analyse-fit';
import { readFit, type FitView } from './read-fit';

export interface ComparedFits {
	fits: FitView[];
	/** Null where the fits cannot be weighed against each other; `obstacle` says why. */
	comparison: Comparison | null;
	obstacle: string | null;
}

export const MOST_COMPARED = 6;

/** The name of a fit within a comparison. */
export const fitName = (fit: Pick<FitView, 'number'>): string => `Fit ${fit.number}`;

/** What the engine would refuse in words of its own; said here in the words of the page. */
function ownObstacle(fits: FitView[]): string | null {
	if (fits.length < 2) return 'Choose at least two fits with a result.';
	const keys = fits.map((f) =>
		f.runs
			.map((r) => r.revisionId)
			.sort()
			.join(' ')
	);
	if (new Set(keys).size > 1) return 'These fits do not rest on the same runs in the same revision.';
	const weights = fits.map((f) => JSON.stringify(f.request.options.weighting));
	if (new Set(weights).size > 1) return 'These fits weigh the data by different error models.';
	if (new Set(fits.map((f) => f.report!.pointsUsed)).size > 1)
		return 'These fits use different numbers of values (rows at time zero, columns or exclusions).';
	if (fits.some((f) => f.report!.criterion === 'determinant'))
		return 'One of these fits is by the determinant criterion, which has no sum of squares to weigh.';
	if (fits.some((f) => f.report!.status !== 'converged')) return 'One of these fits did not settle.';
	if (fits.some((f) => f.report!.aicc === null)) return 'One of these fits has too few values for AICc.';
	return null;
}

/** Fits of one study beside each other; weighed only where they stand on the same values with the same weights. */
export async function compareFits(
	actor: Actor,
	input: { studyId: string; fitIds: string[]; signal?: AbortSignal }
): Promise<ComparedFits> {
	await findStudy(actor, input.studyId, 'study.read');
	const ids = [...new Set(input.fitIds)].slice(0, MOST_COMPARED);
	const all = await Promise.all(ids.map((id) => readFit(actor, id)));
	if (all.some((fit) => fit.studyId !== input.studyId)) throw notFound('fit of this study');
	const fits = all.filter((fit) => fit.report !== null && fit.report.status !== 'failed');
	const obstacle = ownObstacle(fits);
	if (obstacle) return { fits, comparison: null, obstacle };
	const schemes = fits.map((f) => ({ name: fitName(f), request: f.request, report: f.report! }));
	try {
		const comparison = await analyseInThread<Comparison>({ kind: 'comparison', schemes }, input.signal);
		return { fits, comparison, obstacle: null };
	} catch (caught) {
		if (!(caught instanceof AppError && caught.code === 'invalid')) throw caught;
		return { fits, comparison: null, obstacle: caught.message };
	}
}

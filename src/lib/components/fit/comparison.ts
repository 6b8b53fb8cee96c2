/**
 * Fits beside each other. Criteria that weigh one scheme against another (AICc, BIC, Akaike weights) only mean something
 * on the same data with the same weights; where these differ, no such figure is given and the reason is said.
 *
 * Source: K. P. Burnham and D. R. Anderson, Model Selection and Multimodel Inference, Springer 2002 (differences and weights).
 */
import type { FitReport, FitRequest } from '$lib/schemas/fit';

export interface ComparedFit {
	id: string;
	number: number | null;
	report: FitReport | null;
	request: FitRequest;
	scheme: { name: string; number: number };
	runs: { name: string; revisionId: string }[];
}

export interface ComparisonRow {
	id: string;
	deltaAicc: number | null;
	deltaBic: number | null;
	akaikeWeight: number | null;
}

export interface Comparison {
	/** Why the fits cannot be weighed against each other; null when they can. */
	obstacle: string | null;
	rows: ComparisonRow[];
	sentence: string;
}

const dataKey = (fit: ComparedFit): string =>
	fit.runs
		.map((r) => r.revisionId)
		.sort()
		.join(' ');
const weightKey = (fit: ComparedFit): string => JSON.stringify(fit.request.options.weighting);
const differ = (keys: string[]): boolean => new Set(keys).size > 1;

function obstacleOf(fits: ComparedFit[]): string | null {
	if (differ(fits.map(dataKey))) return 'These fits do not rest on the same runs.';
	if (differ(fits.map(weightKey))) return 'These fits weigh the data by different error models.';
	if (differ(fits.map((f) => String(f.report?.pointsUsed))))
		return 'These fits use different numbers of values (rows at time zero, or exclusions).';
	if (fits.some((f) => f.report?.status !== 'converged')) return 'One of these fits did not settle.';
	if (fits.some((f) => f.report?.aicc == null)) return 'One of these fits has too few values for AICc.';
	return null;
}

const name = (fit: ComparedFit): string => `fit ${fit.number} (${fit.scheme.name})`;

export function compareFits(fits: ComparedFit[]): Comparison {
	const obstacle = obstacleOf(fits);
	if (obstacle || fits.length < 2) {
		const rows = fits.map(({ id }) => ({ id, deltaAicc: null, deltaBic: null, akaikeWeight: null }));
		return { obstacle, rows, sentence: obstacle ? `${obstacle} AICc and BIC cannot be compared.` : '' };
	}
	const aicc = fits.map((f) => f.report!.aicc!);
	const bic = fits.map((f) => f.report!.bic!);
	const best = Math.min(...aicc);
	const bestBic = Math.min(...bic);
	const likelihood = aicc.map((a) => Math.exp(-(a - best) / 2));
	const total = likelihood.reduce((a, b) => a + b, 0);
	const rows = fits.map(({ id }, i) => ({
		id,
		deltaAicc: aicc[i] - best,
		deltaBic: bic[i] - bestBic,
		akaikeWeight: likelihood[i] / total
	}));
	return { obstacle: null, rows, sentence: verdict(fits, aicc, best) };
}

function verdict(fits: ComparedFit[], aicc: number[], best: number): string {
	const winner = fits[aicc.indexOf(best)];
	const near = fits.filter((f, i) => f !== winner && aicc[i] - best < 2);
	if (near.length)
		return `These data do not tell ${[winner, ...near].map(name).join(' and ')} apart (AICc differs by less than 2).`;
	const next = Math.min(...aicc.filter((a) => a !== best));
	const margin = Number.isFinite(next) ? `, by ${(next - best).toFixed(1)} in AICc` : '';
	return `Best of those compared: ${name(winner)}${margin}. That does not make it true.`;
}

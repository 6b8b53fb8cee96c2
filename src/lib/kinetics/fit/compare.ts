/**
 * Rival schemes on identical data: which explains them best. The sample that would separate two: `separating-sample.ts`.
 *
 *     Δ = AICc − min AICc,  Akaike weight = e^{−Δ/2}/Σ e^{−Δ/2}
 *     nested: F = [(SSR₀ − SSR₁)/(p₁ − p₀)]/[SSR₁/(n − p₁)] on p₁ − p₀ and n − p₁
 *
 * "Best" means best of those compared, not true. Schemes are compared only on the same values with the same weights.
 *
 * Sources: Burnham & Anderson (2002) 2.6 and 2.9; Bates & Watts (1988) 3.10.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import { fUpper } from './distributions';
import { compileProblem } from './problem';
import { separatingSample, type ComparedScheme, type SeparatingSample } from './separating-sample';
import { figure } from './words';

export type { ComparedScheme, SeparatingSample };

export interface ComparisonRow {
	name: string;
	parameters: number;
	weightedSsr: number;
	residualStandardError: number | null;
	aicc: number | null;
	deltaAicc: number | null;
	akaikeWeight: number | null;
	bic: number | null;
	deltaBic: number | null;
	status: FitReport['status'];
}

export interface NestedTest {
	/** The scheme with fewer parameters, contained in the other. */
	simpler: string;
	fuller: string;
	f: number;
	df1: number;
	df2: number;
	p: number;
}

export interface Comparison {
	pointsUsed: number;
	/** Best AICc first. */
	rows: ComparisonRow[];
	nested: NestedTest[];
	next: SeparatingSample | null;
	findings: FitFinding[];
}

/** The schemes cannot be compared; the message says in what their data or weights differ. */
export class ComparisonError extends Error {
	readonly code = 'not-comparable';
	constructor(message: string) {
		super(message);
		this.name = 'ComparisonError';
	}
}

/** One text for everything that must be equal: conditions, values, limits and weights of all points. */
export function dataFingerprint(request: FitRequest): string {
	const { problem, issues } = compileProblem(request);
	if (!problem) throw new ComparisonError(issues.map((i) => i.message).join(' '));
	return problem.points
		.map((p) => {
			const run = problem.runs[p.run];
			const { id } = run.channels[p.channel];
			return [run.id, run.temperatureK, run.timesS[p.time], id, p.kind, p.observed, p.sigma].join(' ');
		})
		.sort()
		.join('\n');
}

/**
 * Compares two or more fitted schemes.
 * @throws ComparisonError unless all stand on the same values and weights
 */
export function compareSchemes(schemes: ComparedScheme[]): Comparison {
	if (schemes.length < 2) throw new ComparisonError('Two or more schemes are needed for a comparison.');
	if (schemes.some((s) => s.report.criterion === 'determinant'))
		throw new ComparisonError(
			'Schemes are compared by sums of squares; a fit by the determinant criterion has none of its own. Compare fits by least squares.'
		);
	enforceSameData(schemes);
	const rows = schemes.map(row).sort((a, b) => (a.aicc ?? Infinity) - (b.aicc ?? Infinity));
	const best = rows[0].aicc;
	const leastBic = Math.min(...rows.map((r) => r.bic ?? Infinity));
	let total = 0;
	for (const r of rows) {
		r.deltaAicc = r.aicc === null || best === null ? null : r.aicc - best;
		r.deltaBic = r.bic === null ? null : r.bic - leastBic;
		total += r.deltaAicc === null ? 0 : Math.exp(-r.deltaAicc / 2);
	}
	for (const r of rows) r.akaikeWeight = r.deltaAicc === null ? null : Math.exp(-r.deltaAicc / 2) / total;
	const ordered = rows.map((r) => schemes.find((s) => s.name === r.name)!);
	return {
		pointsUsed: schemes[0].report.pointsUsed,
		rows,
		nested: nestedTests(schemes),
		next: separatingSample(ordered[0], ordered[1]),
		findings: verdict(rows)
	};
}

function enforceSameData(schemes: ComparedScheme[]): void {
	if (new Set(schemes.map((s) => s.name)).size !== schemes.length)
		throw new ComparisonError('Two of the schemes carry the same name.');
	const first = dataFingerprint(schemes[0].request).split('\n');
	for (const other of schemes.slice(1)) {
		const lines = dataFingerprint(other.request).split('\n');
		const differing = lines.findIndex((line, i) => line !== first[i]);
		if (lines.length === first.length && differing < 0) continue;
		throw new ComparisonError(
			`"${other.name}" and "${schemes[0].name}" were not fitted to the same values with the same weights (${lines.length} and ${first.length} values${differing >= 0 ? `; the first difference is at "${lines[differing]}"` : ''}). Fit both to the same runs, exclusions and weights.`
		);
	}
}

function row({ name, report }: ComparedScheme): ComparisonRow {
	return {
		name,
		parameters: report.fittedIds.length,
		weightedSsr: report.weightedSsr,
		residualStandardError: report.residualStandardError,
		aicc: report.aicc,
		deltaAicc: null,
		akaikeWeight: null,
		bic: report.bic,
		deltaBic: null,
		status: report.status
	};
}

/** Step directions of a scheme as text: reactant and products with their coefficients. */
function directionSet(request: FitRequest): Set<string> {
	const out = new Set<string>();
	for (const step of request.steps) {
		const products = step.products.map((p) => `${p.coefficient} ${p.species}`).sort();
		out.add(`${step.reactant}>${products.join('+')}`);
		if (step.reverse) out.add(`${step.products[0]?.species}>1 ${step.reactant}`);
	}
	return out;
}

function nestedTests(schemes: ComparedScheme[]): NestedTest[] {
	return schemes.flatMap((simple) =>
		schemes.flatMap((full) => {
			const df1 = full.report.fittedIds.length - simple.report.fittedIds.length;
			if (df1 <= 0) return [];
			const inner = directionSet(simple.request);
			const outer = directionSet(full.request);
			if ([...inner].some((d) => !outer.has(d))) return [];
			const df2 = full.report.pointsUsed - full.report.fittedIds.length;
			if (df2 <= 0) return [];
			const gain = Math.max(0, simple.report.weightedSsr - full.report.weightedSsr);
			const f = gain / df1 / (full.report.weightedSsr / df2);
			return [{ simpler: simple.name, fuller: full.name, f, df1, df2, p: fUpper(f, df1, df2) }];
		})
	);
}

function verdict(rows: ComparisonRow[]): FitFinding[] {
	const close = rows.filter((r) => r.deltaAicc !== null && r.deltaAicc < 2);
	if (close.length > 1)
		return [
			{
				code: 'schemes-not-separated',
				level: 'caution',
				message: `${close.map((r) => `"${r.name}"`).join(' and ')} describe the data equally well (AICc within 2): the data do not decide between them.`
			}
		];
	const weight = rows[0].akaikeWeight;
	return [
		{
			code: 'best-of-compared',
			level: 'note',
			message: `"${rows[0].name}" is the best of those compared${weight === null ? '' : ` (Akaike weight ${figure(weight)})`}; that does not make it true.`
		}
	];
}

/**
 * What a fit found, in plain words: failures first, then cautions, then notes.
 *
 * A finding of level 'stop' says that the constants must not be used as they stand; 'caution' that they can mislead; 'note'
 * how something was counted. Each says what was found, with its number, and what would help.
 */
import type { FitFinding, FitReport } from '../../schemas/fit';
import { ambiguityFindings } from './ambiguity';
import { fitQualityFindings } from './finding-quality';
import { parameterFindings } from './finding-parameters';
import { dataFindings } from './finding-data';
import type { LeastSquaresResult } from './least-squares';
import type { KineticModel } from './model';
import type { KineticProblem } from './problem';
import type { ProfileInterval } from './profile';
import type { SearchOutcome } from './search';
import type { SearchBox } from './starts';
import type { Uncertainty } from './uncertainty';

export interface FindingsInput {
	report: FitReport;
	problem: KineticProblem;
	model: KineticModel;
	best: LeastSquaresResult;
	uncertainty: Uncertainty;
	profiles: ProfileInterval[] | null;
	outcome: SearchOutcome;
	early: FitFinding[];
	box: SearchBox;
}

const RANK = { stop: 0, caution: 1, note: 2 } as const;

/** All findings of a fit, the gravest first; within a level in the order of the rules. */
export function collectFindings(input: FindingsInput): FitFinding[] {
	const all = [
		...convergence(input),
		...fitQualityFindings(input),
		...ambiguityFindings(input),
		...parameterFindings(input),
		...dataFindings(input),
		...input.early
	];
	return withoutRepeats(all)
		.map((finding, i) => ({ finding, i }))
		.sort((a, b) => RANK[a.finding.level] - RANK[b.finding.level] || a.i - b.i)
		.map(({ finding }) => finding);
}

/** A parameter that no data of this kind can determine is named once, not again for its singular value and its profile. */
function withoutRepeats(findings: FitFinding[]): FitFinding[] {
	const order = ['structurally-undetermined', 'not-determined', 'not-identifiable'];
	const covered = (code: string) =>
		new Set(
			findings
				.filter((f) => order.includes(f.code) && order.indexOf(f.code) < order.indexOf(code))
				.flatMap((f) => f.parameters ?? [])
		);
	return findings.filter((f) => {
		if (order.indexOf(f.code) < 1) return true;
		const known = covered(f.code);
		return !f.parameters?.every((id) => known.has(id));
	});
}

function convergence({ best, outcome, report }: FindingsInput): FitFinding[] {
	const findings: FitFinding[] = [];
	if (!best.converged)
		findings.push({
			code: 'not-converged',
			level: 'stop',
			message: `The search did not converge (${best.status}, optimality ${best.optimality.toExponential(1)}). Start nearer, fix a parameter, or simplify the scheme.`
		});
	const reached = outcome.minima[0].starts;
	if (best.converged && report.startsRun >= 10 && reached <= 1 && report.fittedIds.length > 1)
		findings.push({
			code: 'minimum-rarely-found',
			level: 'caution',
			message: `Only ${reached} of ${report.startsRun} starts reached the reported minimum: a better one may exist. Run more starts.`
		});
	return findings;
}

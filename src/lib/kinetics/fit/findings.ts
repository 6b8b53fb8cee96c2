/** Findings in plain words: see below. */
import type { FitFinding, FitReport } from '../../schemas/fit';
import type { LeastSquaresResult } from './levenberg-marquardt';
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

export function collectFindings(input: FindingsInput): FitFinding[] {
	return [...input.early];
}

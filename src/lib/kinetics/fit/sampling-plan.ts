/**
 * When to take the next samples: D-optimal times.
 *
 *     maximise ln det(M₀ + Σ_k g(t_k) g(t_k)ᵀ/σ²)
 *
 * g is the derivative of what is assayed with respect to the estimates at their present values; M₀ the information already
 * there (none for a first plan). An exchange algorithm moves one time at a time over a grid of allowed times until no move
 * helps, then each time is refined between its neighbours. Times keep the minimum gap and the allowed windows.
 *
 * Sources: Box & Lucas, Biometrika 46 (1959) 77; Fedorov, Theory of Optimal Experiments (1972) 3 (exchange); Cook & Nachtsheim,
 * Technometrics 22 (1980) 315.
 */
import type { FitFinding, FitReport, FitRequest } from '../../schemas/fit';
import type { RunContent } from '../../schemas/run';
import { watchOver } from './cancelled';
import type { FitHooks } from './fit';
import { requireLeastSquares } from './restore';
import { Design } from './sampling-design';
import { allowedTimes } from './sampling-grid';

export interface SamplingOptions {
	/** How many samples to plan. */
	samples: number;
	/** Earliest and latest feasible time, in the run's time unit. */
	earliest: number;
	latest: number;
	/** Least time between two samples; 0 allows replicates. */
	minimumGap?: number;
	/** Allowed windows (for example working hours), in the run's time unit; all of the span when left out. */
	windows?: [number, number][];
	/** Channels that will be assayed; all of the run's when left out. */
	channels?: string[];
	/** Standard deviation of one value when there is no report to take it from, in the channel's unit. */
	expectedSd?: number;
	confidence?: number;
}

export interface ExpectedWidth {
	parameter: string;
	unit: string;
	estimate: number;
	/** Half-width of the t interval now; null without a fit, or where the data do not determine it. */
	before: number | null;
	/** Half-width expected with the planned samples added. */
	after: number | null;
}

export interface SamplingPlan {
	/** Ascending, in the run's time unit. */
	times: number[];
	timeUnit: RunContent['timeUnit'];
	/** ln det of the information; −Infinity where the plan cannot determine all parameters. */
	logDeterminant: number;
	expected: ExpectedWidth[];
	findings: FitFinding[];
}

/**
 * Plans samples of one run.
 * @param run conditions and channels of the run to sample; its timepoints do not matter
 * @param report the fit so far: its estimates, s and information are used; null plans from the request's starting values alone
 * @throws RangeError for limits that leave no room; FitCancelled
 */
export function samplingPlan(
	request: FitRequest,
	report: FitReport | null,
	run: RunContent,
	options: SamplingOptions,
	hooks: FitHooks = {}
): SamplingPlan {
	if (report) requireLeastSquares(report, 'A sampling plan');
	const grid = allowedTimes(options);
	const design = new Design(request, report, run, options, grid, watchOver(hooks.cancelled));
	const chosen = design.exchange(options.samples);
	const times = design.refine(chosen.map((k) => grid[k]));
	return design.describe(times);
}

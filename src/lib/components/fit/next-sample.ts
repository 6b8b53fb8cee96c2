/** From a plan of one sample to what it does for the constant that gains most. */
import type { SamplingPlan } from '$lib/kinetics/fit';

export interface NextSampleFound {
	run: string;
	time: number;
	timeUnit: string;
	parameter: string;
	unit: string;
	before: number;
	after: number;
	/** Width that is left, as a share of the width before. */
	share: number;
}

/** A gain below this share is not worth a sentence. */
const NOTICEABLE = 0.97;

export function bestNext(run: string, plan: SamplingPlan): NextSampleFound | null {
	let best: NextSampleFound | null = null;
	for (const { parameter, unit, before, after } of plan.expected) {
		if (before === null || after === null || !(before > 0)) continue;
		const share = after / before;
		if (share < (best?.share ?? NOTICEABLE))
			best = { run, time: plan.times[0], timeUnit: plan.timeUnit, parameter, unit, before, after, share };
	}
	return best;
}

/** Profile-likelihood intervals: see the routine below. */
import type { LeastSquaresResult } from './levenberg-marquardt';
import type { KineticModel } from './model';
import type { SearchBox } from './starts';
import type { Uncertainty } from './uncertainty';

export interface ProfileInterval {
	/** On the scale of estimation; null where the profile stays open. */
	lower: number | null;
	upper: number | null;
}

export interface ProfileInput {
	model: KineticModel;
	box: SearchBox;
	best: LeastSquaresResult;
	uncertainty: Uncertainty;
	confidence: number;
	cancelled?: () => boolean;
	onParameter?: (done: number, total: number) => void;
}

export function profileIntervals(_input: ProfileInput): (ProfileInterval | null)[] | null {
	return null;
}

import type { FitReport } from '../../schemas/fit';
import type { SchemeContent } from '../../schemas/scheme';
import type { FirstFormRequest } from '../../schemas/window';

/** The part of a fit's report that a window rests on. */
export type FitBasis = Pick<
	FitReport,
	'parameters' | 'fittedIds' | 'covariance' | 'scales' | 'degreesOfFreedom' | 'studied'
>;

export interface FirstFormInput {
	/** The scheme version that was fitted. */
	scheme: SchemeContent;
	fit: FitBasis;
	/** As in the fit's options: tied parameters follow their leader through every draw. */
	tied?: { parameter: string; to: string; factor: number }[];
	request: FirstFormRequest;
}

export type RefusalCode =
	| 'outside studied range'
	| 'unknown species'
	| 'missing unit'
	| 'missing charge'
	| 'missing excess'
	| 'missing molar mass'
	| 'scheme not usable'
	| 'fit not usable';

/** Why no window can be computed: what was found, what is expected, and one way out. */
export class WindowRefusal extends Error {
	constructor(
		readonly code: RefusalCode,
		message: string,
		/** Field of the request that it concerns. */
		readonly field?: string
	) {
		super(message);
		this.name = 'WindowRefusal';
	}
}

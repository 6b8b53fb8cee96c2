import type { RecipeContent } from '$lib/schemas/recipe';

/** A rule of the site, entered by its admin: the tool defers to it and never replaces it. */
export interface SiteRule {
	/** The site's own key, for example PS-04. */
	key: string;
	title: string;
	link: string;
	contact: string;
}

/** What a caution is about, to find the site rule that concerns it. */
export type Topic =
	'heat' | 'gas' | 'kinetics' | 'autocatalysis' | 'extrapolation' | 'scale-up' | 'ipc' | 'hazard-statements';

/** Site thresholds: common practice, never constants of the tool. */
export interface CautionThresholds {
	accumulationPercent: number;
	td24MarginK: number;
}
export const DEFAULT_THRESHOLDS: CautionThresholds = { accumulationPercent: 20, td24MarginK: 20 };

/** A rate constant of the fit as cautions need it. */
export interface RateForCaution {
	id: string;
	perH: number;
	/** Lower 95 % limit: the adverse one for accumulation. */
	lowerPerH: number | null;
	energyJPerMol: number | null;
	referenceC: number;
}

export interface CautionFacts {
	content: RecipeContent;
	fit: {
		number: number;
		status: string;
		findings: { code: string; level: 'stop' | 'caution' | 'note'; message: string }[];
	};
	rates: RateForCaution[];
	rules: SiteRule[];
	thresholds: CautionThresholds;
}

/** A caution tells what was found and stops there: no ladder of severity, no instruction of the tool's own. */
export interface Caution {
	/** Changes with the inputs, so that "read by" falls away when they do. */
	key: string;
	code: string;
	kind: 'caution' | 'not assessed';
	title: string;
	/** The number and what it rests on. */
	found: string;
	why: string;
	/** What the tool does not know. */
	unknown: string;
	rule: SiteRule | null;
}

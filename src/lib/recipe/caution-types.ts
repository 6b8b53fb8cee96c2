import type { RecipeContent } from '$lib/schemas/recipe';

/** A rule of the site, entered by its admin: the tool defers to it and never replaces it. */
export interface SiteRule {
	/** What it is about; a caution looks for its own topic first and for "general" then. */
	topic: string;
	name: string;
	link: string;
	contact: string;
}

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

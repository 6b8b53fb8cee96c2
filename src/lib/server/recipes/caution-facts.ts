import { cautions, DEFAULT_THRESHOLDS, type Caution } from '$lib/recipe/cautions';
import type { RecipeContent } from '$lib/schemas/recipe';
import type { Fit } from '../database/models';
import { readSiteSettings } from '../people/site-settings';
import { findingsInWords, ratesOf } from './fit-facts';

/** Every caution of a version as the site's rules and thresholds stand now. */
export async function cautionsOf(content: RecipeContent, fit: Fit): Promise<Caution[]> {
	const site = await readSiteSettings();
	return cautions({
		content,
		fit: { number: fit.number, status: fit.report.status, findings: findingsInWords(fit) },
		rates: ratesOf(fit.request, fit.report),
		rules: site.safetyRules,
		thresholds: {
			...DEFAULT_THRESHOLDS,
			accumulationPercent: site.thresholds.accumulationPercent
		}
	});
}

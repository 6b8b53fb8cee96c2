import { z } from 'zod';
import { safetyRule, thresholds } from '$lib/schemas/people';
import { notFound } from '../errors';
import type { Actor } from '../policy';
import { readSiteSettings, saveSiteSettings } from './site-settings';

/* Single changes to the site settings, as the admin page makes them; each names the version that it was made from. */

/** Adds a rule, or replaces the one whose key was `formerKey`. */
export async function saveSafetyRule(
	actor: Actor,
	input: { version: number; formerKey: string; rule: z.input<typeof safetyRule> }
): Promise<void> {
	const rule = safetyRule.parse(input.rule);
	const present = await readSiteSettings();
	const at = present.safetyRules.findIndex((r) => r.key === input.formerKey);
	if (input.formerKey && at < 0) throw notFound('rule');
	const safetyRules =
		at < 0 ? [...present.safetyRules, rule] : present.safetyRules.map((r, i) => (i === at ? rule : r));
	await saveSiteSettings(actor, { ...present, safetyRules, version: input.version });
}

export async function removeSafetyRule(actor: Actor, input: { version: number; key: string }): Promise<void> {
	const present = await readSiteSettings();
	const safetyRules = present.safetyRules.filter((r) => r.key !== input.key);
	if (safetyRules.length === present.safetyRules.length) throw notFound('rule');
	await saveSiteSettings(actor, { ...present, safetyRules, version: input.version });
}

export async function saveThresholds(
	actor: Actor,
	input: { version: number; thresholds: z.input<typeof thresholds> }
): Promise<void> {
	const present = await readSiteSettings();
	await saveSiteSettings(actor, { ...present, thresholds: input.thresholds, version: input.version });
}

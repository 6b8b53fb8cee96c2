import { fail } from '@sveltejs/kit';
import { requireActor } from '$lib/server/hooks/actor';
import { posted, rowAction } from '$lib/server/forms';
import { page } from '$lib/server/http';
import { removeSafetyRule, saveSafetyRule, saveThresholds } from '$lib/server/people/site-rules';
import { readSiteSettingsVersion } from '$lib/server/people/site-settings';
import { requireSiteAdmin } from '$lib/server/policy';
import type { PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	requireSiteAdmin(requireActor(event));
	return readSiteSettingsVersion();
});

const NEW = 'new';

export const actions = {
	rule: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const data = await event.request.formData();
		const text = (name: string) => posted(data, name);
		const formerKey = text('formerKey');
		const rule = { key: text('key'), title: text('title'), link: text('link'), contact: text('contact') };
		const work = () => saveSafetyRule(actor, { version: Number(text('version')), formerKey, rule });
		const done = formerKey ? `Rule ${rule.key} is changed.` : `Rule ${rule.key} is added.`;
		const result = await rowAction(formerKey || NEW, work, done, 'rules');
		return 'status' in result ? fail(result.status, { ...result.data, typed: rule }) : result;
	}),
	remove: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const data = await event.request.formData();
		const key = posted(data, 'formerKey');
		const work = () => removeSafetyRule(actor, { version: Number(posted(data, 'version')), key });
		return rowAction(key, work, `Rule ${key} is taken off the list.`, 'rules');
	}),
	thresholds: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const data = await event.request.formData();
		const thresholds = {
			accumulationPercent: posted(data, 'accumulationPercent').replace(',', '.'),
			massBalancePercent: posted(data, 'massBalancePercent').replace(',', '.'),
			excessEquivalents: posted(data, 'excessEquivalents').replace(',', '.')
		};
		const work = () => saveThresholds(actor, { version: Number(posted(data, 'version')), thresholds });
		return rowAction('thresholds', work, 'Saved.');
	})
};

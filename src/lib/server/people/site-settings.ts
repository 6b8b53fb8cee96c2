import { z } from 'zod';
import { siteSettings, siteSettingsForm, type SiteSettings } from '$lib/schemas/people';
import { appendAudit } from '../audit/append';
import { write, type Tx } from '../database';
import { Setting } from '../database/models';
import { versionChanged } from '../errors';
import { requireSiteAdmin, type Actor } from '../policy';

const KEY = 'site';

/** Until an admin says otherwise. Each threshold decides from where on a caution is shown, never that there is none. */
export const DEFAULT_SITE_SETTINGS: SiteSettings = {
	safetyRules: [],
	thresholds: { accumulationPercent: 20, massBalancePercent: 5, excessEquivalents: 10 }
};

/** The site's safety rules and thresholds, for everybody who is signed in: cautions point to them. */
export async function readSiteSettings(): Promise<SiteSettings> {
	return (await readSiteSettingsVersion()).settings;
}

export async function readSiteSettingsVersion(
	tx?: Tx
): Promise<{ settings: SiteSettings; version: number; updatedAt: Date | null }> {
	const row = await Setting.findOne({ where: { key: KEY }, transaction: tx });
	if (!row) return { settings: DEFAULT_SITE_SETTINGS, version: 0, updatedAt: null };
	return { settings: siteSettings.parse(row.value), version: row.version, updatedAt: row.updatedAt };
}

async function store(tx: Tx, actor: Actor, value: SiteSettings, version: number): Promise<void> {
	const fields = { value, version: version + 1, updatedById: actor.userId, updatedAt: new Date() };
	if (version === 0) {
		await Setting.create({ key: KEY, ...fields }, { transaction: tx });
		return;
	}
	const [changed] = await Setting.update(fields, { where: { key: KEY, version }, transaction: tx });
	if (changed !== 1) throw versionChanged({});
}

export function saveSiteSettings(actor: Actor, input: z.input<typeof siteSettingsForm>): Promise<void> {
	requireSiteAdmin(actor);
	const { version, ...value } = siteSettingsForm.parse(input);
	return write(async (tx) => {
		const present = await readSiteSettingsVersion(tx);
		if (present.version !== version)
			throw versionChanged({ version: present.version, settings: present.settings });
		await store(tx, actor, value, version);
		await appendAudit(tx, actor, {
			type: 'setting.changed',
			objectType: 'setting',
			objectVersion: version + 1,
			payload: { key: KEY, from: present.settings, to: value }
		});
	});
}

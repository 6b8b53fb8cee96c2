import { z } from 'zod';
import { groupLimitsForm } from '$lib/schemas/people';
import { appendAudit } from '../audit/append';
import { write } from '../database';
import { Group } from '../database/models';
import { notFound, versionChanged } from '../errors';
import { requireCan, type Actor } from '../policy';
import { checkReason } from './reason';
import { readSiteSettings } from './site-settings';

/** Gap of the mass balance from which on the sheets of a group get a note, ± % of the charge: its own, else the site's. */
export async function massBalancePercentOf(groupId: string): Promise<number> {
	const [group, site] = await Promise.all([
		Group.findByPk(groupId, { attributes: ['id', 'massBalancePercent'] }),
		readSiteSettings()
	]);
	return group?.massBalancePercent ?? site.thresholds.massBalancePercent;
}

/** Sets the group's own limit, or goes back to the site's. Sheets read from now on are noted by it; runs made before stay. */
export function changeGroupLimits(actor: Actor, input: z.input<typeof groupLimitsForm>): Promise<void> {
	const { groupId, version, massBalancePercent, reason } = groupLimitsForm.parse(input);
	requireCan(actor, groupId, 'group.limits', 'group');
	return write(async (tx) => {
		const group = await Group.findByPk(groupId, { transaction: tx });
		if (!group) throw notFound('group');
		if (group.version !== version)
			throw versionChanged({ version: group.version, massBalancePercent: group.massBalancePercent });
		if (group.massBalancePercent === massBalancePercent) return;
		const why = checkReason(group.gxp, reason);
		const [changed] = await Group.update(
			{ massBalancePercent, version: version + 1 },
			{ where: { id: groupId, version }, transaction: tx }
		);
		if (changed !== 1) throw versionChanged({});
		await appendAudit(tx, actor, {
			type: 'group.changed',
			groupId,
			objectType: 'group',
			objectId: groupId,
			objectVersion: version + 1,
			payload: { from: { massBalancePercent: group.massBalancePercent }, to: { massBalancePercent } },
			reason: why
		});
	});
}

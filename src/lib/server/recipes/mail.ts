import { Op } from 'sequelize';
import type { Tx } from '../database';
import { Membership, RecipeVersion, Share, User } from '../database/models';
import { queueMail } from '../mail/queue';
import { settings } from '../settings';

/** Address of a page, for mails: a link says where to look and carries no name of a compound. */
export const link = (path: string): string => `${settings().ORIGIN}${path}`;

async function membersOf(tx: Tx, groupId: string, roles?: string[]): Promise<User[]> {
	const rows = await Membership.findAll({
		where: { groupId, ...(roles ? { role: { [Op.in]: roles } } : {}) },
		transaction: tx
	});
	return User.findAll({
		where: { id: rows.map((m) => m.userId), disabledAt: null },
		transaction: tx
	});
}

/** Tells each member of a group once; the text holds no chemistry and no title. */
export async function tellGroup(
	tx: Tx,
	groupId: string,
	mail: { subject: string; text: string },
	options: { roles?: string[]; except?: string } = {}
): Promise<void> {
	for (const user of await membersOf(tx, groupId, options.roles))
		if (user.id !== options.except) await queueMail(tx, { to: user.email, ...mail });
}

export async function tellPerson(
	tx: Tx,
	userId: string,
	mail: { subject: string; text: string }
): Promise<void> {
	const user = await User.findOne({ where: { id: userId, disabledAt: null }, transaction: tx });
	if (user) await queueMail(tx, { to: user.email, ...mail });
}

/** Shares of any version of the recipe that have not been ended. */
export async function openShares(tx: Tx, recipeId: string): Promise<Share[]> {
	const versions = await RecipeVersion.findAll({
		where: { recipeId },
		attributes: ['id'],
		transaction: tx
	});
	return Share.findAll({
		where: { recipeVersionId: versions.map((v) => v.id), endedAt: null },
		transaction: tx
	});
}

/** Tells every group that holds a version what became of it. */
export async function tellHolders(
	tx: Tx,
	recipeId: string,
	mail: (share: Share) => { subject: string; text: string }
): Promise<void> {
	for (const share of await openShares(tx, recipeId)) await tellGroup(tx, share.groupId, mail(share));
}

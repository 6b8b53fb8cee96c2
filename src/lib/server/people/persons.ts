import { Op, type WhereOptions } from 'sequelize';
import { appendAudit } from '../audit/append';
import { endSessions } from '../auth/sessions';
import { write, type Tx } from '../database';
import { Group, Membership, User } from '../database/models';
import { AppError, notFound } from '../errors';
import { requireSiteAdmin, type Actor, type Role } from '../policy';

export interface PersonSummary {
	id: string;
	name: string;
	email: string;
	siteAdmin: boolean;
	disabledAt: Date | null;
	createdAt: Date;
	groups: { name: string; role: Role }[];
}

export interface PersonPage {
	items: PersonSummary[];
	next: string | null;
	total: number;
}

function matching(text: string | undefined): WhereOptions<User> {
	const plain = text?.trim().replace(/[\\%_]/g, '');
	if (!plain) return {};
	const like = { [Op.like]: `%${plain}%` };
	return { [Op.or]: [{ name: like }, { email: like }] };
}

/** The people of the site, newest last, paged by key. */
export async function listPeople(
	actor: Actor,
	input: { text?: string; after?: string; limit?: number } = {}
): Promise<PersonPage> {
	requireSiteAdmin(actor);
	const limit = Math.min(input.limit ?? 50, 200);
	const found = matching(input.text);
	const where = input.after ? { [Op.and]: [found, { id: { [Op.gt]: input.after } }] } : found;
	const [users, total] = await Promise.all([
		User.findAll({ where, order: [['id', 'ASC']], limit: limit + 1 }),
		User.count({ where: found })
	]);
	const shown = users.slice(0, limit);
	const memberships = await Membership.findAll({ where: { userId: shown.map((u) => u.id) } });
	const groups = await Group.findAll({ where: { id: memberships.map((m) => m.groupId) } });
	const nameOf = new Map(groups.map((g) => [g.id, g.name]));
	return {
		items: shown.map((user) => ({
			id: user.id,
			name: user.name,
			email: user.email,
			siteAdmin: user.siteAdmin,
			disabledAt: user.disabledAt,
			createdAt: user.createdAt,
			groups: memberships
				.filter((m) => m.userId === user.id)
				.map((m) => ({ name: nameOf.get(m.groupId) ?? '', role: m.role }))
		})),
		next: users.length > limit ? shown[shown.length - 1].id : null,
		total
	};
}

async function keepAnAdmin(tx: Tx, leaving: string): Promise<void> {
	const others = { siteAdmin: true, disabledAt: null, id: { [Op.ne]: leaving } };
	if ((await User.count({ where: others, transaction: tx })) === 0)
		throw new AppError('conflict', 'This is the only site admin. Make somebody else site admin first.');
}

async function personOf(tx: Tx, userId: string): Promise<User> {
	const user = await User.findByPk(userId, { transaction: tx });
	if (!user) throw notFound('person');
	return user;
}

/** Shuts a person out at once (every session and token ends to work), or lets them in again. Their records stay. */
export function setDisabled(actor: Actor, userId: string, disabled: boolean): Promise<void> {
	requireSiteAdmin(actor);
	return write(async (tx) => {
		const user = await personOf(tx, userId);
		if ((user.disabledAt !== null) === disabled) return;
		if (disabled && user.siteAdmin) await keepAnAdmin(tx, userId);
		await user.update({ disabledAt: disabled ? new Date() : null }, { transaction: tx });
		if (disabled) await endSessions(tx, userId);
		await appendAudit(tx, actor, {
			type: disabled ? 'person.disabled' : 'person.enabled',
			objectType: 'person',
			objectId: userId,
			payload: { email: user.email }
		});
	});
}

export function setSiteAdmin(actor: Actor, userId: string, siteAdmin: boolean): Promise<void> {
	requireSiteAdmin(actor);
	return write(async (tx) => {
		const user = await personOf(tx, userId);
		if (user.siteAdmin === siteAdmin) return;
		if (!siteAdmin) await keepAnAdmin(tx, userId);
		await user.update({ siteAdmin }, { transaction: tx });
		await appendAudit(tx, actor, {
			type: 'person.admin-changed',
			objectType: 'person',
			objectId: userId,
			payload: { siteAdmin }
		});
	});
}

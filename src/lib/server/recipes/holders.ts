import { AuditEvent, Group, RecipeVersion, Share } from '../database/models';

export interface Holder {
	shareId: string;
	groupId: string;
	groupName: string;
	number: number;
	sharedAt: Date;
	endedAt: Date | null;
	/** Who of the group said to have read it, and when. */
	readBy: { printedName: string; at: string }[];
}

/** Groups that hold a version of the recipe, and who of them read it. */
export async function holdersOf(recipeId: string): Promise<Holder[]> {
	const versions = await RecipeVersion.findAll({ where: { recipeId }, attributes: ['id', 'number'] });
	const shares = await Share.findAll({
		where: { recipeVersionId: versions.map((v) => v.id) },
		order: [['createdAt', 'ASC']]
	});
	if (shares.length === 0) return [];
	const [groups, reads] = await Promise.all([
		Group.findAll({ where: { id: shares.map((s) => s.groupId) }, attributes: ['id', 'name'] }),
		AuditEvent.findAll({
			where: { type: 'recipe.read', objectId: shares.map((s) => s.id) },
			attributes: ['objectId', 'printedName', 'at'],
			order: [['seq', 'ASC']]
		})
	]);
	return shares.map((share) => ({
		shareId: share.id,
		groupId: share.groupId,
		groupName: groups.find((g) => g.id === share.groupId)?.name ?? '',
		number: versions.find((v) => v.id === share.recipeVersionId)?.number ?? 0,
		sharedAt: share.createdAt,
		endedAt: share.endedAt,
		readBy: reads
			.filter((r) => r.objectId === share.id)
			.map((r) => ({ printedName: r.printedName, at: r.at }))
	}));
}

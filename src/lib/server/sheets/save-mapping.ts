import type { TableProposal } from '$lib/schemas/sheet';
import type { TableWork } from '$lib/schemas/sheet-work';
import { toSavedMapping } from '$lib/assay';
import { contentHash } from '../audit/canonical';
import type { Tx } from '../database';
import { Mapping } from '../database/models';
import type { Actor } from '../policy';

/** Keeps a confirmed mapping for the lab group: the next sheet with exactly these headers begins with it. */
export async function keepMapping(
	tx: Tx,
	actor: Actor,
	groupId: string,
	table: TableProposal,
	work: TableWork
): Promise<void> {
	const content = toSavedMapping(table.title.slice(0, 80) || 'table', table, work.mapping);
	// Without any header there is nothing by which another sheet could be known to be alike.
	if (content.headers.every((header) => header === '')) return;
	const headerSignature = contentHash(content.headers);
	const now = new Date();
	const [count] = await Mapping.update(
		{ content, updatedAt: now },
		{ where: { groupId, headerSignature }, transaction: tx }
	);
	if (count === 0)
		await Mapping.create(
			{ groupId, headerSignature, content, createdById: actor.userId, updatedAt: now },
			{ transaction: tx }
		);
}

import type { Tx } from '../database';
import { Sheet } from '../database/models';
import { notFound } from '../errors';
import { isId } from '../ids';
import { requireCan, type Action, type Actor } from '../policy';
import { groupsInSight } from '../studies/find';

/** Everything but the two large columns. */
export const LIGHT = [
	'id',
	'studyId',
	'groupId',
	'fileName',
	'mediaType',
	'size',
	'sha256',
	'work',
	'version',
	'uploadedById',
	'createdAt'
] as const;

export interface FindSheetOptions {
	tx?: Tx;
	/** Also the bytes as received, or the grid that was read from them. */
	with?: ('bytes' | 'reading')[];
}

export async function findSheet(
	actor: Actor,
	sheetId: unknown,
	action: Action,
	options: FindSheetOptions = {}
): Promise<Sheet> {
	if (!isId(sheetId)) throw notFound('sheet');
	const sheet = await Sheet.findOne({
		where: { id: sheetId, groupId: groupsInSight(actor) },
		attributes: [...LIGHT, ...(options.with ?? [])],
		transaction: options.tx
	});
	if (!sheet) throw notFound('sheet');
	requireCan(actor, sheet.groupId, action, 'sheet');
	return sheet;
}

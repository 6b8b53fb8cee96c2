import { cast, col } from 'sequelize';
import { Sheet } from '../database/models';
import { notFound } from '../errors';
import type { Actor } from '../policy';
import { findSheet } from './find';

/**
 * The grid that was read from a sheet, as the JSON text in which it lies in the database: a large one is sent on without
 * being taken apart.
 */
export async function readReading(actor: Actor, studyId: string, sheetId: string): Promise<string> {
	const sheet = await findSheet(actor, sheetId, 'study.read');
	if (sheet.studyId !== studyId) throw notFound('sheet of this study');
	const row = (await Sheet.findOne({
		where: { id: sheet.id, groupId: sheet.groupId },
		attributes: [[cast(col('reading'), 'TEXT'), 'text']],
		raw: true
	})) as { text: string | null } | null;
	if (!row?.text) throw notFound('reading of this sheet');
	return row.text;
}

import { appendAudit } from '../audit/append';
import { sha256 } from '../audit/canonical';
import { write } from '../database';
import { AppError } from '../errors';
import type { Actor } from '../policy';
import { findSheet } from './find';

export interface SheetFile {
	fileName: string;
	mediaType: string;
	bytes: Buffer;
	sha256: string;
}

/** The file byte for byte as it was received; its checksum is verified before it goes out. */
export async function downloadSheet(actor: Actor, sheetId: string): Promise<SheetFile> {
	const sheet = await findSheet(actor, sheetId, 'study.read', { with: ['bytes'] });
	const { fileName, mediaType, bytes } = sheet;
	if (sha256(bytes) !== sheet.sha256)
		throw new AppError('internal', 'The stored file no longer has the checksum that it was received with.', {
			detail: `checksum of sheet ${sheet.id} differs`
		});
	await write((tx) =>
		appendAudit(tx, actor, {
			type: 'sheet.downloaded',
			payload: { fileName, sha256: sheet.sha256 },
			groupId: sheet.groupId,
			studyId: sheet.studyId,
			objectType: 'sheet',
			objectId: sheet.id
		})
	);
	return { fileName, mediaType, bytes, sha256: sheet.sha256 };
}

import type { Actor } from '../policy';
import { findStudy } from '../studies/find';

/** Whether this person may put a sheet into this study at all. */
export async function requireUpload(actor: Actor, studyId: string): Promise<void> {
	await findStudy(actor, studyId, 'sheet.upload');
}

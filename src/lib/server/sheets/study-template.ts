import type { Actor } from '../policy';
import { findStudy } from '../studies/find';
import { speciesOf } from './surroundings';
import { templateWorkbook } from './template-workbook';

/** A blank workbook for the species of a study's schemes; the reader takes it back without a question. */
export async function studyTemplate(
	actor: Actor,
	studyId: string
): Promise<{ fileName: string; bytes: Uint8Array }> {
	const study = await findStudy(actor, studyId, 'study.read');
	const bytes = await templateWorkbook(await speciesOf(study.id), study.name);
	const name = study.name.replace(/[^\p{L}\p{N} ._-]/gu, '').trim() || 'study';
	return { fileName: `${name}, template.xlsx`, bytes };
}

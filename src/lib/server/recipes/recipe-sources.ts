import { Fit, WindowResult } from '../database/models';
import { can, type Actor } from '../policy';
import { findStudy } from '../studies/find';
import { windowLine } from '../windows/line';
import { fitLine } from '../fits/line';

/** Fits and windows of a study that a recipe can rest on, newest first. */
export async function recipeSources(
	actor: Actor,
	studyId: string
): Promise<{
	mayCreate: boolean;
	fits: { id: string; number: number; line: string }[];
	windows: { id: string; fitId: string; number: number; line: string }[];
}> {
	const study = await findStudy(actor, studyId, 'recipe.read');
	const [fits, windows] = await Promise.all([
		Fit.findAll({
			where: { studyId: study.id },
			attributes: ['id', 'number', 'report'],
			order: [['number', 'DESC']],
			limit: 50
		}),
		WindowResult.findAll({ where: { studyId: study.id }, order: [['number', 'DESC']], limit: 100 })
	]);
	return {
		mayCreate: can(actor, study.groupId, 'recipe.write'),
		fits: fits.map((f) => ({ id: f.id, number: f.number, line: fitLine(f.report) })),
		windows: windows.map((w) => ({
			id: w.id,
			fitId: w.fitId,
			number: w.number,
			line: windowLine(w.kind, w.result)
		}))
	};
}

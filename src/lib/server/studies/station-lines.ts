import { Op } from 'sequelize';
import { Fit, Job, Recipe, RecipeVersion, Run, Sheet, WindowResult } from '../database/models';
import { fitLine } from '../fits/line';
import { windowLine } from '../windows/line';
import { openQuestions } from '../sheets/work';
import { sizeInWords } from './scheme-versions';
import type { StudyScheme } from './read-study';

export interface StationLines {
	scheme: string;
	data: string;
	fit: string;
	window: string;
	recipe: string;
}

const count = (n: number, one: string, many = `${one}s`): string => `${n} ${n === 1 ? one : many}`;

function schemeLine(schemes: StudyScheme[]): string {
	if (schemes.length === 0) return 'none yet';
	const size = sizeInWords(schemes[0].content);
	return schemes.length === 1 ? size : `${count(schemes.length, 'candidate')}, first: ${size}`;
}

async function dataLine(studyId: string): Promise<string> {
	const [runs, sheets] = await Promise.all([
		Run.count({ where: { studyId, archivedAt: null } }),
		Sheet.findAll({ where: { studyId }, attributes: ['id', 'work'] })
	]);
	const open = sheets.reduce((sum, sheet) => sum + openQuestions(sheet.work), 0);
	if (runs === 0 && sheets.length === 0) return 'no sheet yet';
	const queries = open ? `, ${count(open, 'query', 'queries')} open` : '';
	return `${runs === 0 ? `${count(sheets.length, 'sheet')}, no run yet` : count(runs, 'run')}${queries}`;
}

async function lineOfFit(studyId: string): Promise<string> {
	const [running, latest] = await Promise.all([
		Job.count({ where: { studyId, kind: 'fit', status: { [Op.in]: ['queued', 'running'] } } }),
		Fit.findOne({ where: { studyId }, order: [['number', 'DESC']] })
	]);
	if (running) return count(running, 'fit is running', 'fits are running');
	return latest ? fitLine(latest.report, latest.request) : 'not fitted yet';
}

async function lineOfWindow(studyId: string): Promise<string> {
	const latest = await WindowResult.findOne({ where: { studyId }, order: [['number', 'DESC']] });
	return latest ? windowLine(latest.kind, latest.result) : 'none yet';
}

async function recipeLine(studyId: string): Promise<string> {
	const recipe = await Recipe.findOne({ where: { studyId }, order: [['number', 'DESC']] });
	if (!recipe) return 'none yet';
	const version = await RecipeVersion.findOne({
		where: { recipeId: recipe.id },
		attributes: ['id', 'number', 'state'],
		order: [['number', 'DESC']]
	});
	return version ? `v${version.number} ${version.state}` : 'none yet';
}

/** Where each station of the study stands, in a few words. */
export async function stationLines(studyId: string, schemes: StudyScheme[]): Promise<StationLines> {
	const [data, fit, window, recipe] = await Promise.all([
		dataLine(studyId),
		lineOfFit(studyId),
		lineOfWindow(studyId),
		recipeLine(studyId)
	]);
	return { scheme: schemeLine(schemes), data, fit, window, recipe };
}

import { Op, type WhereOptions } from 'sequelize';
import type { RecipeState } from '$lib/schemas/recipe';
import { FitRun, Recipe, RecipeVersion, Run, Share, Study, User } from '../database/models';
import { containing, wordsOf } from '../database/text-filter';
import { isId } from '../ids';
import { requireCan, type Actor } from '../policy';
import { findStudy } from '../studies/find';

export interface RecipeSummary {
	id: string;
	number: number;
	title: string;
	studyId: string;
	studyName: string;
	newest: { number: number; state: RecipeState; author: string; updatedAt: Date };
	/** The version that is in force. */
	validated: number | null;
	/** Groups that hold a version. */
	holders: number;
	/** The newest version rests on a run that was revised since. */
	supersededData: boolean;
}

export interface RecipePage {
	items: RecipeSummary[];
	next: string | null;
	total: number;
}

export interface ListRecipesInput {
	groupId: string;
	studyId?: string;
	filter?: string;
	after?: string;
	limit?: number;
}

function matching(input: ListRecipesInput): WhereOptions {
	return {
		groupId: input.groupId,
		...(input.studyId ? { studyId: input.studyId } : {}),
		[Op.and]: wordsOf(input.filter).map((word) => ({ title: containing(word) }))
	};
}

/** Fits that rest on a run which has a newer revision than the one used. */
async function supersededFits(fitIds: string[]): Promise<Set<string>> {
	const used = await FitRun.findAll({ where: { fitId: fitIds } });
	const runs = await Run.findAll({
		where: { id: [...new Set(used.map((u) => u.runId))] },
		attributes: ['id', 'currentRevisionId']
	});
	const current = new Map(runs.map((r) => [r.id, r.currentRevisionId]));
	return new Set(used.filter((u) => current.get(u.runId) !== u.runRevisionId).map((u) => u.fitId));
}

async function summaries(recipes: Recipe[]): Promise<RecipeSummary[]> {
	const versions = await RecipeVersion.findAll({
		where: { recipeId: recipes.map((r) => r.id) },
		attributes: ['id', 'recipeId', 'number', 'state', 'authorId', 'fitId', 'updatedAt'],
		order: [['number', 'DESC']]
	});
	const [studies, people, shares, superseded] = await Promise.all([
		Study.findAll({ where: { id: recipes.map((r) => r.studyId) }, attributes: ['id', 'name'] }),
		User.findAll({ where: { id: versions.map((v) => v.authorId) }, attributes: ['id', 'name'] }),
		Share.findAll({
			where: { recipeVersionId: versions.map((v) => v.id), endedAt: null },
			attributes: ['groupId', 'recipeVersionId']
		}),
		supersededFits(versions.map((v) => v.fitId))
	]);
	return recipes.flatMap((recipe) => {
		const own = versions.filter((v) => v.recipeId === recipe.id);
		const [newest] = own;
		if (!newest) return [];
		const ids = new Set(own.map((v) => v.id));
		return [
			{
				id: recipe.id,
				number: recipe.number,
				title: recipe.title,
				studyId: recipe.studyId,
				studyName: studies.find((s) => s.id === recipe.studyId)?.name ?? '',
				newest: {
					number: newest.number,
					state: newest.state,
					author: people.find((p) => p.id === newest.authorId)?.name ?? 'somebody who has left',
					updatedAt: newest.updatedAt
				},
				validated: own.find((v) => v.state === 'validated')?.number ?? null,
				holders: new Set(shares.filter((s) => ids.has(s.recipeVersionId)).map((s) => s.groupId)).size,
				supersededData: superseded.has(newest.fitId)
			}
		];
	});
}

/** Recipes of a group (or of one of its studies), newest first, a page at a time. */
export async function listRecipes(actor: Actor, input: ListRecipesInput): Promise<RecipePage> {
	requireCan(actor, input.groupId, 'recipe.read', 'group');
	const limit = Math.min(Math.max(Math.trunc(input.limit ?? 25), 1), 100);
	const where = matching(input);
	const [total, found] = await Promise.all([
		Recipe.count({ where }),
		Recipe.findAll({
			where: isId(input.after) ? { [Op.and]: [where, { id: { [Op.lt]: input.after } }] } : where,
			order: [['id', 'DESC']],
			limit: limit + 1
		})
	]);
	const recipes = found.slice(0, limit);
	return {
		items: await summaries(recipes),
		next: found.length > limit ? (recipes.at(-1)?.id ?? null) : null,
		total
	};
}

/** Recipes of one study, in sight of the actor. */
export async function listStudyRecipes(actor: Actor, studyId: string): Promise<RecipePage> {
	const study = await findStudy(actor, studyId, 'recipe.read');
	return listRecipes(actor, { groupId: study.groupId, studyId: study.id, limit: 100 });
}

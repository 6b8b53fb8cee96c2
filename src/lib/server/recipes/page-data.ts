import type { Actor } from '../policy';
import { readStudy, type StudyView } from '../studies/read-study';
import { readRecipe, type RecipeView } from './read-recipe';
import { shareTargets } from './share-recipe';

export interface RecipePageData {
	view: RecipeView;
	frame: StudyView;
	targets: { id: string; name: string }[];
}

/** What the page of a recipe shows, with the frame of its study around it. */
export async function recipePage(actor: Actor, recipeId: string, number?: number): Promise<RecipePageData> {
	const view = await readRecipe(actor, recipeId, number);
	const [frame, targets] = await Promise.all([
		readStudy(actor, view.study.id),
		view.may.share ? shareTargets(actor, recipeId) : []
	]);
	return { view, frame, targets };
}

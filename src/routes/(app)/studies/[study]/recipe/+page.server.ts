import { redirect } from '@sveltejs/kit';
import { createRecipeForm } from '$lib/schemas/recipe';
import { posted, rowAction } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { createRecipe } from '$lib/server/recipes/create-recipe';
import { listStudyRecipes } from '$lib/server/recipes/list-recipes';
import { recipeSources } from '$lib/server/recipes/recipe-sources';
import type { Actions, PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const { study } = event.params;
	const [recipes, sources] = await Promise.all([listStudyRecipes(actor, study), recipeSources(actor, study)]);
	return {
		recipes,
		sources,
		chosen: {
			fit: event.url.searchParams.get('fit') ?? '',
			window: event.url.searchParams.get('window') ?? ''
		}
	};
});

export const actions: Actions = {
	create: async (event) => {
		const form = await event.request.formData();
		let id = '';
		const answer = await rowAction(
			'create',
			async () => {
				const input = createRecipeForm.parse({
					fitId: posted(form, 'fitId'),
					windowId: posted(form, 'windowId') || null,
					title: posted(form, 'title')
				});
				id = (await createRecipe(requireActor(event), { ...input, studyId: event.params.study })).id;
			},
			'Begun'
		);
		if ('status' in answer) return answer;
		redirect(303, `/recipes/${id}`);
	}
};

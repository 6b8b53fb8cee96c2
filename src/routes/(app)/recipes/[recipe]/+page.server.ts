import { redirect, type RequestEvent } from '@sveltejs/kit';
import { posted, rowAction } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { acknowledgeCaution } from '$lib/server/recipes/acknowledge-caution';
import { commentOnRecipe } from '$lib/server/recipes/comment-on-recipe';
import { recipePage } from '$lib/server/recipes/page-data';
import { returnRecipe } from '$lib/server/recipes/return-recipe';
import { endShare, shareRecipe } from '$lib/server/recipes/share-recipe';
import { startNewVersion } from '$lib/server/recipes/start-new-version';
import { withdrawRecipe } from '$lib/server/recipes/withdraw-recipe';
import type { Actions, PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	event.depends('recipe:view');
	return recipePage(requireActor(event), event.params.recipe);
});

type Event = RequestEvent<{ recipe: string }>;
type Act = (actor: ReturnType<typeof requireActor>, recipeId: string, form: FormData) => Promise<unknown>;

/** One small form of the page: what a use case refuses stands in its dialog. */
const act = (row: string, done: string, work: Act) => async (event: Event) => {
	const form = await event.request.formData();
	const actor = requireActor(event);
	return rowAction(row, () => work(actor, event.params.recipe, form), done);
};

const whole = (text: string): number => (/^\d{1,9}$/.test(text) ? Number(text) : 0);
const which = (form: FormData) => ({
	number: whole(posted(form, 'number')),
	version: whole(posted(form, 'version'))
});

export const actions: Actions = {
	return: act('return', 'Returned', (actor, recipeId, form) =>
		returnRecipe(actor, { recipeId, ...which(form), comment: posted(form, 'comment') })
	),
	comment: act('comment', 'Kept', (actor, recipeId, form) =>
		commentOnRecipe(actor, {
			recipeId,
			number: which(form).number,
			text: posted(form, 'text'),
			anchor: posted(form, 'anchor') || null
		})
	),
	share: act('share', 'Shared', (actor, recipeId, form) =>
		shareRecipe(actor, { recipeId, number: which(form).number, groupId: posted(form, 'groupId') })
	),
	endShare: act('endShare', 'Ended', (actor, recipeId, form) =>
		endShare(actor, { recipeId, shareId: posted(form, 'shareId') })
	),
	withdraw: act('withdraw', 'Withdrawn', (actor, recipeId, form) =>
		withdrawRecipe(actor, { recipeId, ...which(form), reason: posted(form, 'reason') })
	),
	acknowledge: act('acknowledge', 'Recorded', (actor, recipeId, form) =>
		acknowledgeCaution(actor, {
			recipeId,
			number: which(form).number,
			cautionKey: posted(form, 'cautionKey')
		})
	),
	next: async (event: Event) => {
		const form = await event.request.formData();
		const actor = requireActor(event);
		const answer = await rowAction(
			'next',
			() => startNewVersion(actor, { recipeId: event.params.recipe, reason: posted(form, 'reason') }),
			'Begun'
		);
		if ('status' in answer) return answer;
		redirect(303, `/recipes/${event.params.recipe}`);
	}
};

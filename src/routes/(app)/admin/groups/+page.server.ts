import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { groupForm } from '$lib/schemas/people';
import { incomplete, posted, refused, rowAction, type FormMessage } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { changeGroup, createGroup, listGroups } from '$lib/server/people/groups';
import type { PageServerLoadEvent, RequestEvent } from './$types';

type Fields = { name: string; gxp: boolean };

export const load = page(async (event: PageServerLoadEvent) => ({
	groups: await listGroups(requireActor(event)),
	form: await superValidate<Fields, FormMessage>(zod4(groupForm))
}));

export const actions = {
	create: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await superValidate<Fields, FormMessage>(event.request, zod4(groupForm));
		if (!form.valid) return incomplete(form);
		try {
			await createGroup(actor, form.data);
		} catch (caught) {
			return refused(form, caught);
		}
		form.message = {
			kind: 'done',
			text: `${form.data.name} is there. Invite its first group lead from the page of people.`
		};
		return { form };
	}),
	change: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const data = await event.request.formData();
		const groupId = posted(data, 'groupId');
		const work = () =>
			changeGroup(actor, {
				groupId,
				version: posted(data, 'version'),
				name: posted(data, 'name'),
				gxp: data.get('gxp') === 'on',
				reason: posted(data, 'reason')
			});
		return rowAction(groupId, work, 'Saved.');
	})
};

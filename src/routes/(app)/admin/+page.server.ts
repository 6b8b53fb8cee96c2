import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { adminInviteForm } from '$lib/schemas/people';
import { incomplete, posted, refused, rowAction, type FormMessage } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listGroups } from '$lib/server/people/groups';
import { inviteAsAdmin, listInvitations, revokeInvitation } from '$lib/server/people/invite';
import { listPeople, setDisabled, setSiteAdmin } from '$lib/server/people/persons';
import type { Role } from '$lib/server/policy';
import type { PageServerLoadEvent, RequestEvent } from './$types';

type InviteFields = { email: string; groupId: string; role: Role; siteAdmin: boolean };

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const text = (event.url.searchParams.get('q') ?? '').slice(0, 80);
	const after = event.url.searchParams.get('after') ?? undefined;
	const [people, groups, invitations, form] = await Promise.all([
		listPeople(actor, { text, after }),
		listGroups(actor),
		listInvitations(actor),
		superValidate<InviteFields, FormMessage>(zod4(adminInviteForm))
	]);
	return { text, after: after ?? null, people, groups, invitations, form, me: actor.userId };
});

/** One person's row: a switch that is set one way or the other. */
async function change(event: RequestEvent, work: (id: string) => Promise<void>, done: string) {
	const id = posted(await event.request.formData(), 'id');
	return rowAction(id, () => work(id), done);
}

export const actions = {
	invite: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await superValidate<InviteFields, FormMessage>(event.request, zod4(adminInviteForm));
		if (!form.valid) return incomplete(form);
		try {
			await inviteAsAdmin(actor, form.data);
		} catch (caught) {
			return refused(form, caught);
		}
		form.message = { kind: 'done', text: `An invitation is on its way to ${form.data.email}.` };
		return { form };
	}),
	revoke: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const id = posted(await event.request.formData(), 'id');
		return rowAction('invitations', () => revokeInvitation(actor, id), 'The invitation no longer works.');
	}),
	disable: page((event: RequestEvent) =>
		change(
			event,
			(id) => setDisabled(requireActor(event), id, true),
			'Disabled: every session has ended and tokens no longer work.'
		)
	),
	enable: page((event: RequestEvent) =>
		change(event, (id) => setDisabled(requireActor(event), id, false), 'Enabled again.')
	),
	admin: page((event: RequestEvent) =>
		change(event, (id) => setSiteAdmin(requireActor(event), id, true), 'Site admin from now on.')
	),
	noAdmin: page((event: RequestEvent) =>
		change(event, (id) => setSiteAdmin(requireActor(event), id, false), 'No longer site admin.')
	)
};

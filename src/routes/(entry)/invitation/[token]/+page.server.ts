import { redirect } from '@sveltejs/kit';
import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { openSession } from '../../../../auth';
import { joinForm } from '$lib/schemas/people';
import { incomplete, refused, rowAction, type FormMessage } from '$lib/server/forms';
import { GROUP_COOKIE, requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { acceptInvitation, joinWithAccount, readInvitation } from '$lib/server/people/accept-invitation';
import { ROLE_NAMES } from '$lib/server/policy';
import { settings } from '$lib/server/settings';
import type { PageServerLoadEvent, RequestEvent } from './$types';

type Fields = { name: string; password: string; again: string };

export const load = page(async ({ params, locals }: PageServerLoadEvent) => {
	const invitation = await readInvitation(params.token);
	return {
		...invitation,
		roleName: invitation.role ? ROLE_NAMES[invitation.role] : null,
		signedInAs: locals.actor?.email ?? null,
		here: `/invitation/${params.token}`,
		form: await superValidate<Fields, FormMessage>(zod4(joinForm))
	};
});

/** Somebody who joins a group wants to see that group next. */
function showGroup(event: RequestEvent, groupId: string | null): void {
	if (!groupId) return;
	event.cookies.set(GROUP_COOKIE, groupId, {
		path: '/',
		secure: settings().ORIGIN.startsWith('https:'),
		maxAge: 365 * 86400
	});
}

export const actions = {
	create: page(async (event: RequestEvent) => {
		const form = await superValidate<Fields, FormMessage>(event.request, zod4(joinForm));
		if (!form.valid) return incomplete(form);
		try {
			const { email } = await acceptInvitation(event.params.token, form.data);
			await openSession(event, { email, password: form.data.password });
		} catch (caught) {
			return refused(form, caught);
		}
		redirect(303, '/');
	}),
	join: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const answer = await rowAction(
			'join',
			async () => showGroup(event, (await joinWithAccount(actor, event.params.token)).groupId),
			''
		);
		if (!('status' in answer)) redirect(303, '/');
		return answer;
	})
};

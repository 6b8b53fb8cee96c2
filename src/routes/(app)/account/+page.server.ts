import { fail, redirect } from '@sveltejs/kit';
import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { closeSession, openSession } from '../../../auth';
import { nameForm, passwordForm, tokenForm } from '$lib/schemas/people';
import { signOutEverywhere } from '$lib/server/auth/sessions';
import { incomplete, posted, refused, rowAction, withoutSecrets, type FormMessage } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { changePassword, renameSelf } from '$lib/server/people/account';
import { createToken, listTokens, revokeToken } from '$lib/server/people/tokens';
import { ROLE_NAMES, type Scope } from '$lib/server/policy';
import type { PageServerLoadEvent, RequestEvent } from './$types';

type NameFields = { name: string };
type PasswordFields = { current: string; password: string; again: string };
type TokenFields = { name: string; scopes: Scope[]; days: number };

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const [name, password, token, tokens] = await Promise.all([
		superValidate<NameFields, FormMessage>({ name: actor.name }, zod4(nameForm), { id: 'name' }),
		superValidate<PasswordFields, FormMessage>(zod4(passwordForm), { id: 'password' }),
		superValidate<TokenFields, FormMessage>({ name: '', scopes: ['read'], days: 90 }, zod4(tokenForm), {
			id: 'token',
			errors: false
		}),
		listTokens(actor)
	]);
	return {
		forms: { name, password, token },
		tokens,
		roles: actor.memberships.map((m) => ({ group: m.groupName, role: ROLE_NAMES[m.role] })),
		siteAdmin: actor.siteAdmin,
		signedInAt: actor.signedInAt
	};
});

export const actions = {
	name: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await superValidate<NameFields, FormMessage>(event.request, zod4(nameForm), { id: 'name' });
		if (!form.valid) return incomplete(form);
		try {
			await renameSelf(actor, form.data);
		} catch (caught) {
			return refused(form, caught);
		}
		form.message = { kind: 'done', text: 'Saved. Signatures keep the name under which they were given.' };
		return { form };
	}),

	password: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await superValidate<PasswordFields, FormMessage>(event.request, zod4(passwordForm), {
			id: 'password'
		});
		if (!form.valid) return incomplete(form);
		try {
			await changePassword(actor, form.data);
			// Every session has ended with the old password; this one goes on with the new.
			await openSession(event, { email: actor.email, password: form.data.password });
		} catch (caught) {
			return refused(form, caught);
		}
		form.message = { kind: 'done', text: 'The password is changed. Your other sessions have ended.' };
		return { form: withoutSecrets(form) };
	}),

	everywhere: page(async (event: RequestEvent) => {
		await signOutEverywhere(requireActor(event));
		await closeSession(event);
		redirect(303, '/sign-in?notice=everywhere');
	}),

	token: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await superValidate<TokenFields, FormMessage>(event.request, zod4(tokenForm), {
			id: 'token'
		});
		if (!form.valid) return incomplete(form);
		try {
			const { token } = await createToken(actor, form.data);
			return { form, created: { name: form.data.name, token } };
		} catch (caught) {
			return refused(form, caught);
		}
	}),

	revoke: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const id = posted(await event.request.formData(), 'id');
		if (!id) return fail(400, { answer: { row: '', kind: 'refusal' as const, text: 'Which token?' } });
		return rowAction(id, () => revokeToken(actor, id), 'The token is revoked.');
	})
};

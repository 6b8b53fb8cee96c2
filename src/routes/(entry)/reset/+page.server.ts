import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { askResetForm } from '$lib/schemas/people';
import { incomplete, refused, type FormMessage } from '$lib/server/forms';
import { page } from '$lib/server/http';
import { askPasswordReset } from '$lib/server/people/reset-password';
import type { RequestEvent } from './$types';

export const load = page(async () => ({
	form: await superValidate<{ email: string }, FormMessage>(zod4(askResetForm))
}));

export const actions = {
	default: page(async (event: RequestEvent) => {
		const form = await superValidate<{ email: string }, FormMessage>(event.request, zod4(askResetForm));
		if (!form.valid) return incomplete(form);
		try {
			await askPasswordReset({ ...form.data, address: event.getClientAddress() });
		} catch (caught) {
			return refused(form, caught);
		}
		// The same words whether or not anybody has this address.
		form.message = {
			kind: 'done',
			text: `If ${form.data.email} belongs to an account, a link is on its way to it. It works for an hour.`
		};
		return { form };
	})
};

import { redirect } from '@sveltejs/kit';
import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { resetForm } from '$lib/schemas/people';
import { incomplete, refused, type FormMessage } from '$lib/server/forms';
import { page } from '$lib/server/http';
import { readPasswordReset, resetPassword } from '$lib/server/people/reset-password';
import type { PageServerLoadEvent, RequestEvent } from './$types';

type Fields = { password: string; again: string };

export const load = page(async ({ params }: PageServerLoadEvent) => ({
	...(await readPasswordReset(params.token)),
	form: await superValidate<Fields, FormMessage>(zod4(resetForm))
}));

export const actions = {
	default: page(async ({ request, params }: RequestEvent) => {
		const form = await superValidate<Fields, FormMessage>(request, zod4(resetForm));
		if (!form.valid) return incomplete(form);
		try {
			await resetPassword(params.token, form.data);
		} catch (caught) {
			return refused(form, caught);
		}
		redirect(303, '/sign-in?notice=password-set');
	})
};

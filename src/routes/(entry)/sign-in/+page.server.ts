import { redirect } from '@sveltejs/kit';
import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { openSession } from '../../../auth';
import { signInForm } from '$lib/schemas/people';
import { incomplete, refused, type FormMessage } from '$lib/server/forms';
import { safeNext } from '$lib/server/hooks/guard';
import { page } from '$lib/server/http';
import type { PageServerLoadEvent, RequestEvent } from './$types';

/** Why somebody lands here; the address names one of these and nothing else is shown. */
const NOTICES: Record<string, string> = {
	'signed-out': 'You are signed out on this device.',
	everywhere: 'You are signed out on every device.',
	'password-set': 'The new password is set. Sign in with it.',
	ended: 'Your session has ended. Sign in to go on where you were.'
};

export const load = page(async ({ locals, url }: PageServerLoadEvent) => {
	const next = url.searchParams.get('next');
	if (locals.actor) redirect(303, safeNext(next, '/'));
	const form = await superValidate<{ email: string; password: string; next: string }, FormMessage>(
		{ email: '', password: '', next: next ? safeNext(next, '') : '' },
		zod4(signInForm),
		{ errors: false }
	);
	return { form, notice: NOTICES[url.searchParams.get('notice') ?? ''] ?? null, wanted: Boolean(next) };
});

export const actions = {
	default: page(async (event: RequestEvent) => {
		const form = await superValidate<{ email: string; password: string; next: string }, FormMessage>(
			event.request,
			zod4(signInForm)
		);
		if (!form.valid) return incomplete(form);
		try {
			await openSession(event, form.data);
		} catch (caught) {
			return refused(form, caught);
		}
		redirect(303, safeNext(form.data.next, '/'));
	})
};

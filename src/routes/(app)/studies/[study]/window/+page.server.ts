import { fail, redirect } from '@sveltejs/kit';
import { ZodError } from 'zod';
import { readWindowForm, windowRequest } from '$lib/schemas/window-form';
import { AppError } from '$lib/server/errors';
import { listFits } from '$lib/server/fits/list-fits';
import { readFit } from '$lib/server/fits/read-fit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readStudy } from '$lib/server/studies/read-study';
import { computeWindow } from '$lib/server/windows/compute-window';
import { listWindows } from '$lib/server/windows/list-windows';
import type { Actions, PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const [fits, windows] = await Promise.all([
		listFits(actor, event.params.study),
		listWindows(actor, event.params.study)
	]);
	const usable = fits.filter((f) => f.outcome === 'converged');
	const wanted = event.url.searchParams.get('fit');
	const chosen = usable.find((f) => f.id === wanted) ?? usable[0];
	return { fits: usable, windows, fit: chosen ? await readFit(actor, chosen.id) : null };
});

async function compute(event: RequestEvent) {
	const actor = requireActor(event);
	const data = await event.request.formData();
	const entered = Object.fromEntries([...data.entries()].filter(([, v]) => typeof v === 'string')) as Record<
		string,
		string
	>;
	try {
		const form = readWindowForm(data);
		if (!form.success) throw form.error;
		const { criteria } = await readStudy(actor, event.params.study);
		const made = await computeWindow(actor, {
			fitId: form.data.fitId,
			input: windowRequest(form.data, criteria)
		});
		redirect(303, `/studies/${event.params.study}/window/${made.id}`);
	} catch (caught) {
		if (caught instanceof ZodError) return fail(422, { message: caught.issues[0].message, entered });
		if (caught instanceof AppError && caught.code === 'invalid')
			return fail(422, { message: caught.message, entered });
		throw caught;
	}
}

export const actions: Actions = { compute: page(compute) };

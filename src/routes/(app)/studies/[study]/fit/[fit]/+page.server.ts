import { fail, redirect } from '@sveltejs/kit';
import { AppError, notFound } from '$lib/server/errors';
import { cancelFit } from '$lib/server/fits/cancel-fit';
import { confirmFit, listConfirmations } from '$lib/server/fits/confirm-fit';
import { readFit } from '$lib/server/fits/read-fit';
import { refit } from '$lib/server/fits/refit';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { listRuns } from '$lib/server/runs/list-runs';
import type { Actions, PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	event.depends('study:fit');
	const actor = requireActor(event);
	const fit = await readFit(actor, event.params.fit);
	if (fit.studyId !== event.params.study) throw notFound('fit of this study');
	const [confirmations, runs] = await Promise.all([
		listConfirmations(actor, fit.id),
		listRuns(actor, fit.studyId)
	]);
	const used = new Set(fit.runs.map((r) => r.id));
	const unused = runs
		.filter((r) => !used.has(r.id))
		.map(({ id, name, temperature }) => ({ id, name, temperature }));
	return { fit, confirmations, unused };
});

const SAID: string[] = ['wrong-state', 'invalid', 'unavailable', 'too-many-requests'];

/** What cannot be done in this state is said on the page; everything else is an error page. */
async function orSay(work: () => Promise<unknown>) {
	try {
		await work();
		return { done: true };
	} catch (caught) {
		if (caught instanceof AppError && SAID.includes(caught.code))
			return fail(caught.status, { message: caught.message });
		throw caught;
	}
}

const cancel = (event: RequestEvent) => orSay(() => cancelFit(requireActor(event), event.params.fit));

async function confirm(event: RequestEvent) {
	const runId = (await event.request.formData()).get('runId');
	if (typeof runId !== 'string') return fail(422, { message: 'Choose a run.' });
	return orSay(() => confirmFit(requireActor(event), { fitId: event.params.fit, runId }));
}

async function again(event: RequestEvent) {
	const { study, fit } = event.params;
	return orSay(async () => {
		const { id } = await refit(requireActor(event), fit);
		redirect(303, `/studies/${study}/fit/${id}?beside=${fit}`);
	});
}

export const actions: Actions = { cancel: page(cancel), confirm: page(confirm), refit: page(again) };

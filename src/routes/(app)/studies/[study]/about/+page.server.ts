import { fail, redirect } from '@sveltejs/kit';
import { isEmptyRow, messagesOf, rowsOf, toCriterion } from '$lib/components/study/criteria-form';
import { studyForm } from '$lib/schemas/study';
import { AppError } from '$lib/server/errors';
import { posted } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readStudy } from '$lib/server/studies/read-study';
import { updateStudy } from '$lib/server/studies/update-study';
import type { PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const { canWrite } = await readStudy(requireActor(event), event.params.study);
	return { canWrite };
});

export const actions = {
	default: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await event.request.formData();
		const rows = rowsOf(form).filter((row) => !isEmptyRow(row));
		const typed = { name: posted(form, 'name'), decision: posted(form, 'decision'), rows };
		const read = studyForm.safeParse({ ...typed, rows: undefined, criteria: rows.map(toCriterion) });
		if (!read.success) return fail(400, { typed, errors: messagesOf(read.error.issues), conflict: '' });
		const version = Number(posted(form, 'version'));
		try {
			await updateStudy(actor, { ...read.data, studyId: event.params.study, version });
		} catch (caught) {
			if (!(caught instanceof AppError) || caught.code !== 'version-changed') throw caught;
			return fail(409, { typed, errors: {}, conflict: caught.message });
		}
		redirect(303, `/studies/${event.params.study}/scheme`);
	})
};

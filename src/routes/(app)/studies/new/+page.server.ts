import { fail, redirect } from '@sveltejs/kit';
import { isEmptyRow, messagesOf, rowsOf, toCriterion } from '$lib/components/study/criteria-form';
import { studyForm } from '$lib/schemas/study';
import { posted } from '$lib/server/forms';
import { requireActor, requireGroup } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { requireCan } from '$lib/server/policy';
import { createStudy } from '$lib/server/studies/create-study';
import type { PageServerLoadEvent, RequestEvent } from './$types';

export const load = page((event: PageServerLoadEvent) => {
	const groupId = requireGroup(event);
	requireCan(requireActor(event), groupId, 'study.write', 'group');
	return { groupId };
});

export const actions = {
	default: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const form = await event.request.formData();
		// The group that the page showed, not the one chosen meanwhile in another window.
		const groupId = posted(form, 'groupId') || requireGroup(event);
		const rows = rowsOf(form).filter((row) => !isEmptyRow(row));
		const typed = { name: posted(form, 'name'), decision: posted(form, 'decision'), rows };
		const read = studyForm.safeParse({
			name: typed.name,
			decision: typed.decision,
			criteria: rows.map(toCriterion)
		});
		if (!read.success) return fail(400, { typed, errors: messagesOf(read.error.issues) });
		const study = await createStudy(actor, { ...read.data, groupId });
		redirect(303, `/studies/${study.id}/scheme`);
	})
};

import { posted, rowAction } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { readMailbox, readMailState, retryMail } from '$lib/server/mail/state';
import type { PageServerLoadEvent, RequestEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const state = await readMailState(actor);
	return { state, mailbox: state.way === 'mailbox' ? await readMailbox(actor) : null };
});

export const actions = {
	retry: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const id = posted(await event.request.formData(), 'id');
		return rowAction(id, () => retryMail(actor, id), 'Queued again; it is sent within seconds.');
	})
};

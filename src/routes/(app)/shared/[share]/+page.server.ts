import { posted, rowAction } from '$lib/server/forms';
import { requireActor } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { acknowledgeCaution } from '$lib/server/recipes/acknowledge-caution';
import { markSharedRead, readShared } from '$lib/server/recipes/read-shared';
import type { Actions, PageServerLoadEvent } from './$types';

export const load = page(async (event: PageServerLoadEvent) => {
	return { view: await readShared(requireActor(event), event.params.share) };
});

export const actions: Actions = {
	read: (event) =>
		rowAction('read', () => markSharedRead(requireActor(event), event.params.share), 'Recorded'),
	acknowledge: async (event) => {
		const form = await event.request.formData();
		const input = { shareId: event.params.share, cautionKey: posted(form, 'cautionKey') };
		return rowAction('acknowledge', () => acknowledgeCaution(requireActor(event), input), 'Recorded');
	}
};

import { superValidate } from 'sveltekit-superforms';
import { zod4 } from 'sveltekit-superforms/adapters';
import { inviteForm, removeForm, roleForm } from '$lib/schemas/people';
import { incomplete, posted, refused, rowAction, type FormMessage } from '$lib/server/forms';
import { requireActor, requireGroup } from '$lib/server/hooks/actor';
import { page } from '$lib/server/http';
import { changeGroupLimits } from '$lib/server/people/group-limits';
import { inviteMember, revokeInvitation } from '$lib/server/people/invite';
import { changeRole, readGroup, removeMember } from '$lib/server/people/members';
import type { Role } from '$lib/server/policy';
import type { PageServerLoadEvent, RequestEvent } from './$types';

type InviteFields = { email: string; role: Role };

export const load = page(async (event: PageServerLoadEvent) => {
	const actor = requireActor(event);
	const [group, form] = await Promise.all([
		readGroup(actor, requireGroup(event)),
		superValidate<InviteFields, FormMessage>(zod4(inviteForm))
	]);
	return { group, form, me: actor.userId };
});

/** As posted; the use case checks them. */
const groupLimits = ({ version, massBalancePercent, reason }: Record<string, unknown>) => ({
	version,
	massBalancePercent,
	reason: typeof reason === 'string' ? reason : ''
});

/** The fields of a member's row. */
async function rowOf(event: RequestEvent) {
	const actor = requireActor(event);
	// The group that the page showed, not the one chosen meanwhile in another window.
	const form = await event.request.formData();
	const groupId = posted(form, 'groupId') || requireGroup(event);
	return { actor, groupId, userId: posted(form, 'userId'), fields: Object.fromEntries(form) };
}

export const actions = {
	invite: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const data = await event.request.formData();
		const groupId = posted(data, 'groupId') || requireGroup(event);
		const form = await superValidate<InviteFields, FormMessage>(data, zod4(inviteForm));
		if (!form.valid) return incomplete(form);
		try {
			await inviteMember(actor, { ...form.data, groupId });
		} catch (caught) {
			return refused(form, caught);
		}
		form.message = { kind: 'done', text: `An invitation is on its way to ${form.data.email}.` };
		form.data.email = '';
		return { form };
	}),

	role: page(async (event: RequestEvent) => {
		const { actor, groupId, userId, fields } = await rowOf(event);
		const work = async () => changeRole(actor, { ...roleForm.parse(fields), groupId });
		return rowAction(userId, work, 'The role is changed.');
	}),

	remove: page(async (event: RequestEvent) => {
		const { actor, groupId, userId, fields } = await rowOf(event);
		const work = async () => removeMember(actor, { ...removeForm.parse(fields), groupId });
		const done = 'Taken out of the group. What they did and signed stays.';
		return rowAction(userId, work, done, 'members');
	}),

	limits: page(async (event: RequestEvent) => {
		const { actor, groupId, fields } = await rowOf(event);
		const work = async () => changeGroupLimits(actor, { ...groupLimits(fields), groupId });
		return rowAction('limits', work, 'The limit is kept; sheets are read by it from now on.');
	}),

	revoke: page(async (event: RequestEvent) => {
		const actor = requireActor(event);
		const id = posted(await event.request.formData(), 'id');
		return rowAction('invitations', () => revokeInvitation(actor, id), 'The invitation no longer works.');
	})
};

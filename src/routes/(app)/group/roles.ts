import type { Role } from '$lib/server/policy';

export const ROLE_LABELS: Record<Role, string> = {
	chemist: 'Chemist',
	group_lead: 'Group lead',
	qa_reviewer: 'QA reviewer',
	reader: 'Reader'
};

export const ROLE_OPTIONS = (Object.entries(ROLE_LABELS) as [Role, string][]).map(([value, label]) => ({
	value,
	label
}));

/** In the words of the people who have the role. */
export const ROLE_TEXTS: { role: Role; may: string; mayNot: string }[] = [
	{
		role: 'chemist',
		may: 'Studies, schemes, sheets, runs, fits, windows and draft recipes; submits recipes for review.',
		mayNot: 'Signs off no own work.'
	},
	{
		role: 'group_lead',
		may: 'All of that; returns recipes with comments, validates and signs them, shares and withdraws them; invites members and sets the limits of the group.',
		mayNot: 'Signs no version that they wrote.'
	},
	{
		role: 'qa_reviewer',
		may: 'Reads everything, checks the audit trail, signs “Verified”, exports workbooks.',
		mayNot: 'Changes no content.'
	},
	{
		role: 'reader',
		may: 'Reads recipes shared with the group and acknowledges their cautions.',
		mayNot: 'Sees no studies.'
	}
];

import { z } from 'zod';

/** The forms and API bodies that concern people, groups and the site. */

export const ROLE_CODES = ['chemist', 'group_lead', 'qa_reviewer', 'reader'] as const;
export const SCOPE_CODES = ['read', 'write', 'fit', 'export'] as const;

export const PASSWORD_MIN = 12;
export const PASSWORD_MAX = 200;

const email = z
	.string()
	.trim()
	.toLowerCase()
	.max(254, 'An e-mail address has at most 254 characters.')
	.pipe(z.email('Enter an e-mail address such as m.okafor@example.com.'));
const personName = z
	.string()
	.trim()
	.min(2, 'Enter the name as it shall be printed beside signatures.')
	.max(80, 'A name has at most 80 characters.')
	// It is printed beside signatures and in mails: one line, read in the order in which it was typed.
	.regex(/^[^\p{Cc}\u2028\u2029\u202A-\u202E\u2066-\u2069]*$/u, 'A name is letters in one line.');
const newPassword = z
	.string()
	.min(PASSWORD_MIN, `Use at least ${PASSWORD_MIN} characters; a few words in a row are fine.`)
	.max(PASSWORD_MAX, `Use at most ${PASSWORD_MAX} characters.`);
const groupName = z
	.string()
	.trim()
	.min(2, 'Give the group a name of at least two letters.')
	.max(80, 'A group name has at most 80 characters.');
const role = z.enum(ROLE_CODES, { message: 'Choose a role.' });
const id = z.uuid('This id is not one of ours.');
const version = z.coerce.number().int().min(1);

/** Why something was changed: words, not a dot. */
export const reasonText = z
	.string()
	.trim()
	.max(500, 'A reason has at most 500 characters.')
	.refine((v) => v === '' || (v.match(/\p{L}/gu)?.length ?? 0) >= 5, 'Say in a few words why.');

const sameTwice = {
	check: (v: { password: string; again: string }) => v.password === v.again,
	params: { path: ['again'], message: 'The two passwords differ. Type the new one again.' }
};

export const signInForm = z.object({
	email: z.string().trim().min(1, 'Enter your e-mail address.').max(254),
	password: z.string().min(1, 'Enter your password.').max(1000),
	next: z.string().max(2000).default('')
});

export const joinForm = z
	.object({ name: personName, password: newPassword, again: z.string() })
	.refine(sameTwice.check, sameTwice.params);
export const askResetForm = z.object({ email });
export const resetForm = z
	.object({ password: newPassword, again: z.string() })
	.refine(sameTwice.check, sameTwice.params);

export const nameForm = z.object({ name: personName });
export const passwordForm = z
	.object({
		current: z.string().min(1, 'Enter the password that you use now.').max(1000),
		password: newPassword,
		again: z.string()
	})
	.refine(sameTwice.check, sameTwice.params);

export const tokenForm = z.object({
	name: z
		.string()
		.trim()
		.min(2, 'Name the script or machine that will use it.')
		.max(60, 'A token name has at most 60 characters.'),
	scopes: z.array(z.enum(SCOPE_CODES)).min(1, 'Choose at least one thing that it may do.'),
	days: z.coerce.number().int().min(1, 'At least one day.').max(366, 'At most 366 days.').default(90)
});

export const inviteForm = z.object({ email, role });
/** By a site admin: into a group with a role, or as another site admin. */
export const adminInviteForm = z
	.object({
		email,
		groupId: z.union([id, z.literal('')]).default(''),
		role: role.default('chemist'),
		siteAdmin: z.boolean().default(false)
	})
	.refine((v) => v.groupId !== '' || v.siteAdmin, {
		path: ['groupId'],
		message: 'Choose a group, or invite as site admin.'
	});

export const roleForm = z.object({ userId: id, role, reason: reasonText.default('') });
export const removeForm = z.object({ userId: id, reason: reasonText.default('') });

export const groupForm = z.object({ name: groupName, gxp: z.boolean().default(false) });
export const groupChangeForm = z.object({
	groupId: id,
	version,
	name: groupName,
	gxp: z.boolean().default(false),
	reason: reasonText.default('')
});

export const safetyRule = z.object({
	key: z
		.string()
		.trim()
		.min(1, 'Give the rule the key that your site uses, for example PS-04.')
		.max(20, 'A key has at most 20 characters.'),
	title: z.string().trim().min(3, 'Say what the rule is about.').max(160),
	link: z
		.string()
		.trim()
		.max(500)
		.refine((v) => v === '' || /^https?:\/\/\S+$/i.test(v), 'A link begins with https:// or http://.'),
	contact: z.string().trim().min(2, 'Say whom to ask: name, function or extension.').max(160)
});
export type SafetyRule = z.infer<typeof safetyRule>;

const percent = (what: string) => {
	const message = `Enter ${what} in percent, from 0.1 to 100.`;
	return z.coerce.number({ message }).min(0.1, message).max(100, message);
};

/** From which value on a caution is shown. */
export const thresholds = z.object({
	/** Unreacted share of a dosed reagent, % of the amount dosed so far. */
	accumulationPercent: percent('the accumulation'),
	/** Gap in the mass balance, % of the charge. */
	massBalancePercent: percent('the gap'),
	/** Least excess, equivalents, at which a reagent may count as constant. */
	excessEquivalents: z.coerce.number({ message: 'Enter equivalents.' }).min(1).max(1000)
});
export type Thresholds = z.infer<typeof thresholds>;

/** The group's own limit; empty: as the site has it. A decimal comma is a decimal sign here too. */
export const groupLimitsForm = z.object({
	groupId: id,
	version,
	massBalancePercent: z.preprocess((v) => {
		const text = typeof v === 'string' ? v.trim().replace(',', '.') : v;
		return text === '' || text === undefined ? null : text;
	}, percent('the gap').nullable()),
	reason: reasonText.default('')
});

export const siteSettings = z.object({ safetyRules: z.array(safetyRule).max(50), thresholds });
export type SiteSettings = z.infer<typeof siteSettings>;

export const siteSettingsForm = siteSettings
	.extend({ version: z.coerce.number().int().min(0) })
	.refine((v) => new Set(v.safetyRules.map((r) => r.key.toLowerCase())).size === v.safetyRules.length, {
		path: ['safetyRules', '_errors'],
		message: 'Two rules have the same key. Each key stands for one rule.'
	});

import { z } from 'zod';

export const peopleEvents = {
	'person.signed-in': z.object({}),
	'person.sign-in-failed': z.object({ email: z.string(), lockedUntil: z.string().nullable() }),
	'person.password-check-failed': z.object({ failures: z.number(), lockedUntil: z.string().nullable() }),
	'person.signed-out': z.object({ everywhere: z.boolean() }),
	'person.created': z.object({ email: z.string(), name: z.string(), siteAdmin: z.boolean() }),
	'person.renamed': z.object({ from: z.string(), to: z.string() }),
	'person.disabled': z.object({ email: z.string() }),
	'person.enabled': z.object({ email: z.string() }),
	'person.admin-changed': z.object({ siteAdmin: z.boolean() }),
	'person.password-changed': z.object({ by: z.enum(['self', 'reset', 'invitation']) }),
	'person.password-reset-asked': z.object({}),
	'group.created': z.object({ name: z.string(), gxp: z.boolean() }),
	'group.changed': z.object({
		from: z.record(z.string(), z.unknown()),
		to: z.record(z.string(), z.unknown())
	}),
	'member.invited': z.object({ email: z.string(), role: z.string().nullable(), expiresAt: z.string() }),
	'member.invitation-revoked': z.object({ email: z.string() }),
	'member.joined': z.object({ name: z.string(), role: z.string() }),
	'member.role-changed': z.object({ name: z.string(), from: z.string(), to: z.string() }),
	'member.removed': z.object({ name: z.string(), role: z.string() }),
	'token.created': z.object({ name: z.string(), scopes: z.array(z.string()), expiresAt: z.string() }),
	'token.revoked': z.object({ name: z.string() }),
	'mail.tried-again': z.object({ subject: z.string() }),
	'audit.verified': z.object({
		entries: z.number(),
		lastHash: z.string(),
		firstBad: z.object({ seq: z.number(), why: z.string() }).nullable()
	}),
	'audit.exported': z.object({ entries: z.number(), filter: z.record(z.string(), z.unknown()) }),
	'setting.changed': z.object({ key: z.string(), from: z.unknown(), to: z.unknown() })
};

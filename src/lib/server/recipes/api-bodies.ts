import { z } from 'zod';
import { commentText, MEANINGS, reasonText, recipeContent } from '$lib/schemas/recipe';

/* Bodies of the calls on recipes. `number` is the version meant; left out, the newest. */

const number = z.int().positive().optional();
const version = z.int().positive().optional();
const contentHash = z
	.string()
	.regex(/^[0-9a-f]{64}$/, 'contentHash has 64 hexadecimal digits, as the recipe shows it.');

export const patchBody = z.strictObject({ number, version, content: recipeContent });
export const submitBody = z.strictObject({
	number,
	version,
	contentHash: contentHash.optional(),
	password: z.string().max(1000).optional(),
	comment: z.string().trim().max(2000).optional()
});
export const returnBody = z.strictObject({ number, version, comment: commentText });
export const shareBody = z.strictObject({ number, groupId: z.uuid() });
export const withdrawBody = z.strictObject({ number, version, reason: reasonText });
export const versionBody = z.strictObject({
	reason: reasonText,
	fitId: z.uuid().nullish(),
	windowId: z.uuid().nullish()
});
export const commentBody = z.strictObject({
	number,
	text: commentText,
	anchor: z.string().max(90).nullish()
});
export const signBody = z.strictObject({
	number,
	version,
	meaning: z.enum(MEANINGS),
	contentHash,
	password: z.string().min(1, 'Give your password again.').max(1000),
	comment: z.string().trim().max(2000).optional()
});

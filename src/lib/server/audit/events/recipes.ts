import { z } from 'zod';

export const recipeEvents = {
	'recipe.created': z.object({ title: z.string(), fitId: z.string() }),
	'recipe.version-saved': z.object({ number: z.number(), contentHash: z.string() }),
	'recipe.version-started': z.object({ number: z.number(), from: z.number() }),
	'recipe.submitted': z.object({ number: z.number(), contentHash: z.string() }),
	'recipe.returned': z.object({ number: z.number(), comment: z.string() }),
	'recipe.commented': z.object({ number: z.number(), comment: z.string(), anchor: z.string().nullable() }),
	'recipe.signed': z.object({
		number: z.number(),
		meaning: z.string(),
		contentHash: z.string(),
		printedName: z.string()
	}),
	'recipe.signing-failed': z.object({ number: z.number(), why: z.string() }),
	'recipe.taken-back': z.object({ number: z.number() }),
	'recipe.superseded': z.object({ number: z.number(), by: z.number() }),
	'recipe.withdrawn': z.object({ number: z.number() }),
	'recipe.shared': z.object({ number: z.number(), withGroupId: z.string(), withGroupName: z.string() }),
	'recipe.share-ended': z.object({ number: z.number(), withGroupId: z.string(), withGroupName: z.string() }),
	'recipe.caution-read': z.object({ number: z.number(), cautionKey: z.string() }),
	'recipe.read': z.object({ number: z.number() }),
	'workbook.exported': z.object({ number: z.number(), sha256: z.string() })
};

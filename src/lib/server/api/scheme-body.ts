import { z } from 'zod';
import { schemeContent, type SchemeContent } from '$lib/schemas/scheme';

const name = z.string().trim().min(1, 'Give the scheme a name.').max(80);

/** A scheme's content stands in `content`, or its parts stand beside the name. */
const parts = {
	content: schemeContent.optional(),
	species: schemeContent.shape.species.optional(),
	steps: schemeContent.shape.steps.optional(),
	referenceTemperature: schemeContent.shape.referenceTemperature.optional()
};

export const newScheme = z.strictObject({ name, ...parts });
export const changedScheme = z.strictObject({
	name: name.optional(),
	version: z.int().positive().optional(),
	...parts
});

/** The content that a body carries in either form; undefined when it carries none. */
export function contentOf(body: z.infer<typeof changedScheme>): SchemeContent | undefined {
	if (body.content) return body.content;
	const { species, steps, referenceTemperature } = body;
	if (!species && !steps && !referenceTemperature) return undefined;
	return schemeContent.parse({ species, steps, referenceTemperature });
}

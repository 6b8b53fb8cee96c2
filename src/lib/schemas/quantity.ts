import { z } from 'zod';

/** A number never travels without its unit. */
export const quantity = z.strictObject({
	value: z.number({ error: 'A number is expected here.' }),
	unit: z.string().min(1, 'Give the unit.').max(20)
});
export type Quantity = z.infer<typeof quantity>;

/** Fixed at a value, or fitted (from a guess when one is given). */
export const fittable = z.union([
	quantity,
	z.strictObject({ fit: z.literal(true), guess: quantity.optional() })
]);
export type Fittable = z.infer<typeof fittable>;
export const isFitted = (f: Fittable | null | undefined): f is { fit: true; guess?: Quantity } =>
	f != null && 'fit' in f;

export const id = z
	.string()
	.min(1)
	.max(40)
	.regex(/^[A-Za-z][A-Za-z0-9_-]*$/, 'Use letters, digits, - and _, beginning with a letter.')
	.refine(
		// Tables are looked up by id: a name that every object has by itself would be found in each of them.
		(s) => s !== 'prototype' && !(s in Object.prototype),
		'This word cannot be used as an id.'
	);

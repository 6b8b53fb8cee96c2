import { z } from 'zod';
import { fitOptions, type FitOptions } from './fit';

const checkbox = z
	.union([z.boolean(), z.literal('on'), z.literal('')])
	.optional()
	.transform((v) => v === true || v === 'on');

const whole = (low: number, high: number) =>
	z.coerce
		.number({ error: 'A whole number is expected here.' })
		.int('A whole number is expected here.')
		.min(low, `At least ${low}.`)
		.max(high, `At most ${high}.`);

/** The form of the fit station: what a person chooses before a fit, in the words of the page. */
export const fitForm = z.object({
	schemeId: z.uuid('Choose a scheme.'),
	runIds: z.array(z.uuid()).min(1, 'Choose at least one run.').max(100),
	energies: z.enum(['missing', 'all', 'scheme']).default('missing'),
	charges: checkbox,
	timeZero: checkbox,
	weighting: z.enum(['constant', 'proportional', 'replicates']).default('constant'),
	starts: whole(1, 500).default(20),
	seed: whole(0, 2 ** 31 - 1).default(1)
});
export type FitForm = z.output<typeof fitForm>;

export function optionsOf(form: FitForm): FitOptions {
	return fitOptions.parse({
		weighting: { model: form.weighting },
		starts: form.starts,
		seed: form.seed,
		...(form.charges ? { useTimeZeroRow: true } : {})
	});
}

/** Reads the form's fields, or the same as JSON from the page. */
export function readFitForm(data: FormData) {
	const one = (name: string) => (data.has(name) ? data.get(name) : undefined);
	return fitForm.safeParse({
		schemeId: one('schemeId'),
		runIds: data.getAll('runIds'),
		energies: one('energies'),
		charges: one('charges'),
		timeZero: one('timeZero'),
		weighting: one('weighting'),
		starts: one('starts'),
		seed: one('seed')
	});
}

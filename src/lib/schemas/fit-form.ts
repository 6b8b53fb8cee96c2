import { z } from 'zod';
import { fitOptions, type FitOptions } from './fit';
import { quantity } from './quantity';

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

/** What a person says of one parameter, beyond what the scheme and the runs say. */
export const parameterSetting = z.strictObject({
	state: z.enum(['fitted', 'fixed', 'tied']),
	/** Starting value (fitted) or value (fixed). */
	value: quantity.optional(),
	lower: quantity.optional(),
	upper: quantity.optional(),
	/** Tied: factor · the other. */
	to: z.string().optional(),
	factor: z.number().positive('A factor above zero is expected.').optional()
});
export type ParameterSetting = z.infer<typeof parameterSetting>;
export const parameterSettings = z.record(z.string().max(120), parameterSetting);
export type ParameterSettings = z.infer<typeof parameterSettings>;

const errorParts = z.strictObject({
	a: z.number({ error: 'Give the constant part a.' }).positive('The constant part a must be above zero.'),
	b: z.number().nonnegative('The proportional part b cannot be below zero.')
});

/** Fields that travel as JSON in one form field. */
const fromJson = <T extends z.ZodType>(schema: T) =>
	z.preprocess((value) => {
		if (typeof value !== 'string') return value;
		if (value.trim() === '') return undefined;
		try {
			return JSON.parse(value) as unknown;
		} catch {
			return value;
		}
	}, schema);

/** The form of the fit station: what a person chooses before a fit, in the words of the page. */
export const fitForm = z.object({
	schemeId: z.uuid('Choose a scheme.'),
	runIds: z.array(z.uuid()).min(1, 'Choose at least one run.').max(100),
	energies: z.enum(['missing', 'all', 'scheme']).default('missing'),
	reference: z.enum(['auto', 'scheme', 'centre']).default('auto'),
	charges: checkbox,
	timeZero: checkbox,
	weighting: z.enum(['constant', 'proportional', 'combined', 'replicates']).default('constant'),
	/** Parts a and b of the combined error model for each column. */
	errors: fromJson(z.record(z.string(), errorParts).default({})),
	parameters: fromJson(parameterSettings.default({})),
	/** Shared ids that get a value of their own in each run. */
	local: fromJson(z.array(z.string().max(120)).max(100).default([])),
	criterion: z.enum(['least squares', 'determinant']).default('least squares'),
	timeZeroRow: z.enum(['as charged', 'use', 'leave']).default('as charged'),
	confidence: z.coerce
		.number({ error: 'A percentage is expected here.' })
		.min(50, 'At least 50 %.')
		.max(99.9, 'At most 99.9 %.')
		.default(95),
	starts: whole(1, 500).default(20),
	seed: whole(0, 2 ** 31 - 1).default(1)
});
export type FitForm = z.output<typeof fitForm>;

/** What a fit begins from besides scheme and runs: kept with it, and offered to the next one. */
export type KeptChoices = Pick<
	FitForm,
	| 'weighting'
	| 'errors'
	| 'reference'
	| 'parameters'
	| 'local'
	| 'criterion'
	| 'timeZeroRow'
	| 'confidence'
	| 'starts'
	| 'seed'
>;

function timeZeroRow(form: FitForm): Pick<FitOptions, 'useTimeZeroRow'> {
	if (form.timeZeroRow === 'use') return { useTimeZeroRow: true };
	if (form.timeZeroRow === 'leave') return { useTimeZeroRow: false };
	return form.charges ? { useTimeZeroRow: true } : {};
}

function parameterOptions(settings: ParameterSettings): Pick<FitOptions, 'fixed' | 'tied' | 'bounds'> {
	const entries = Object.entries(settings);
	return {
		fixed: entries.filter(([, s]) => s.state === 'fixed').map(([id]) => id),
		tied: entries.flatMap(([parameter, s]) =>
			s.state === 'tied' && s.to ? [{ parameter, to: s.to, factor: s.factor ?? 1 }] : []
		),
		bounds: Object.fromEntries(
			entries.flatMap(([id, { state, lower, upper }]) =>
				state === 'fitted' && (lower || upper)
					? [[id, { ...(lower ? { lower } : {}), ...(upper ? { upper } : {}) }]]
					: []
			)
		)
	};
}

export function optionsOf(form: FitForm): FitOptions {
	const { weighting: model, errors } = form;
	return fitOptions.parse({
		weighting: { model, ...(model === 'combined' ? { perChannel: errors } : {}) },
		...parameterOptions(form.parameters),
		// Left out where nobody asked, so that equal requests stay equal.
		...(form.local.length ? { local: form.local } : {}),
		...(form.criterion === 'determinant' ? { criterion: form.criterion } : {}),
		starts: form.starts,
		seed: form.seed,
		confidenceLevel: form.confidence / 100,
		...timeZeroRow(form)
	});
}

const FIELDS = [
	'schemeId',
	'energies',
	'reference',
	'charges',
	'timeZero',
	'weighting',
	'errors',
	'parameters',
	'local',
	'criterion',
	'timeZeroRow',
	'confidence',
	'starts',
	'seed'
] as const;

/** Reads the form's fields. */
export function readFitForm(data: FormData) {
	const fields = FIELDS.map((name) => [name, data.has(name) ? data.get(name) : undefined] as const);
	return fitForm.safeParse({ ...Object.fromEntries(fields), runIds: data.getAll('runIds') });
}

import { z } from 'zod';
import { firstFormRequest, type FirstFormRequest } from './window';
import type { CriterionContent } from './criterion';

/** Accepts a decimal comma as well as a point; an empty field is missing, never zero. */
const number = (what: string) =>
	z
		.string()
		.trim()
		.transform((text) => Number(text.replace(',', '.').replace('−', '-')))
		.refine((value) => Number.isFinite(value), `${what}: a number is expected here.`);

export const windowForm = z.object({
	fitId: z.uuid('Choose a fit.'),
	temperature: number('Temperature'),
	horizon: z.string().trim().default(''),
	charge: z.record(z.string(), z.string()),
	excess: z.record(z.string(), z.string()),
	outside: z.boolean().default(false)
});

export type WindowForm = z.output<typeof windowForm>;

const prefixed = (data: FormData, prefix: string): Record<string, string> =>
	Object.fromEntries(
		[...data.entries()]
			.filter(([key, value]) => key.startsWith(prefix) && typeof value === 'string')
			.map(([key, value]) => [key.slice(prefix.length), value as string])
	);

const text = (data: FormData, name: string): string => {
	const value = data.get(name);
	return typeof value === 'string' ? value : '';
};

export function readWindowForm(data: FormData) {
	return windowForm.safeParse({
		fitId: text(data, 'fitId'),
		temperature: text(data, 'temperature'),
		horizon: text(data, 'horizon'),
		charge: prefixed(data, 'charge.'),
		excess: prefixed(data, 'excess.'),
		outside: data.get('outside') === 'on'
	});
}

function amounts(
	given: Record<string, string>,
	what: string
): Record<string, { value: number; unit: string }> {
	const filled = Object.entries(given).filter(([, value]) => value.trim() !== '');
	return Object.fromEntries(
		filled.map(([species, value]) => [
			species,
			{ value: number(`${what} of ${species}`).parse(value), unit: 'mol/L' }
		])
	);
}

/** The engine's request from the form and the study's criteria. @throws ZodError that names the field. */
export function windowRequest(form: WindowForm, criteria: CriterionContent[]): FirstFormRequest {
	return firstFormRequest.parse({
		temperature: { value: form.temperature, unit: 'degC' },
		charge: amounts(form.charge, 'Charge'),
		excess: amounts(form.excess, 'Excess'),
		criteria,
		...(form.horizon === ''
			? {}
			: { horizon: { value: number('Latest time').parse(form.horizon), unit: 'h' } }),
		allowOutsideStudied: form.outside
	});
}

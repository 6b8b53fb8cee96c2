/** Whether an answer can be taken: its option exists, and every value that the option needs is there and readable. */
import type { Answer, FindingOption, ValueField } from '$lib/schemas/sheet';
import { type Decimal, parseNumber } from './numbers';

/** An answer that is complete. */
export interface Taken {
	key: string;
	reason?: string;
	number(field?: string): number;
	text(field?: string): string;
}

export function take(
	answer: Answer | undefined,
	options: FindingOption[],
	decimal: Decimal | null
): { taken: Taken | null; problem?: string } {
	if (!answer) return { taken: null };
	const option = options.find((o) => o.key === answer.key);
	if (!option)
		return { taken: null, problem: 'This answer no longer fits what the sheet holds. Choose again.' };
	const values = answer.values ?? {};
	for (const field of option.needsValue ?? []) {
		const problem = fieldProblem(
			field,
			Object.hasOwn(values, field.key) ? values[field.key] : undefined,
			decimal
		);
		if (problem) return { taken: null, problem };
	}
	const number = (field = 'value') => asNumber(values[field], decimal) ?? NaN;
	const text = (field = 'value') => String(values[field] ?? '').trim();
	return { taken: { key: answer.key, reason: answer.reason, number, text } };
}

function fieldProblem(
	field: ValueField,
	value: string | number | undefined,
	decimal: Decimal | null
): string | null {
	if (value === undefined || String(value).trim() === '') return `${field.label} is missing.`;
	if (field.kind === 'number' && asNumber(value, decimal) === null)
		return `"${value}" is not a number. Write digits, such as 0.25.`;
	if (field.kind === 'choice' && !field.choices?.some((c) => c.key === value))
		return `"${value}" is not among the choices. Choose one of them.`;
	return null;
}

/** A typed number: the file's own convention first, else the only reading there is. */
function asNumber(value: string | number | undefined, decimal: Decimal | null): number | null {
	if (typeof value === 'number') return Number.isFinite(value) ? value : null;
	if (value === undefined) return null;
	return parseNumber(value, decimal) ?? parseNumber(value, null);
}

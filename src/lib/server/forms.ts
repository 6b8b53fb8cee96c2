import { error, fail, isHttpError, isRedirect, redirect, type ActionFailure } from '@sveltejs/kit';
import type { SuperValidated } from 'sveltekit-superforms';
import { toAppError } from './http';
import { AppError } from './errors';

/** What a form answers with, above its fields. */
export interface FormMessage {
	kind: 'done' | 'refusal';
	text: string;
}

type Fields = Record<string, unknown>;
type Answered<T extends Fields> = SuperValidated<T, FormMessage>;

/** Passwords go one way: they are not sent back with the answer. */
const SECRET_FIELDS = ['password', 'again', 'current'];
export function withoutSecrets<T extends Fields>(form: Answered<T>): Answered<T> {
	const data: Fields = form.data;
	for (const field of SECRET_FIELDS) if (field in data) data[field] = '';
	return form;
}

/** Answers a form whose fields are not right yet; the messages stand beside them. */
export function incomplete<T extends Fields>(form: Answered<T>): ActionFailure<{ form: Answered<T> }> {
	return fail(400, { form: withoutSecrets(form) });
}

/** Refusals that the person at the form can do something about; others are the error page's. */
const AT_THE_FORM = new Set(['invalid', 'conflict', 'version-changed', 'wrong-state', 'locked', 'too-large']);

export function formRefusal(caught: unknown): AppError {
	if (isRedirect(caught)) redirect(caught.status, caught.location);
	if (isHttpError(caught)) error(caught.status, caught.body);
	const known = toAppError(caught);
	if (AT_THE_FORM.has(known.code)) return known;
	const errorId = known.options.data?.errorId;
	error(known.status, {
		message: known.message,
		code: known.code,
		...(typeof errorId === 'string' ? { id: errorId } : {})
	});
}

/** Answers a form with the refusal of a use case: beside the field that it concerns, else above the form. */
export function refused<T extends Fields>(
	form: Answered<T>,
	caught: unknown
): ActionFailure<{ form: Answered<T> }> {
	const known = formRefusal(caught);
	const errors: Record<string, string[]> = {};
	for (const { field, message } of known.options.fields ?? [])
		if (field in form.data) (errors[field] ??= []).push(message);
	form.valid = false;
	if (Object.keys(errors).length) form.errors = errors;
	else form.message = { kind: 'refusal', text: known.message };
	return fail(known.status, { form: withoutSecrets(form) });
}

/** Answers one of several small forms on a page, such as the row of a member: `form.row` says which. */
export interface RowAnswer {
	row: string;
	kind: FormMessage['kind'];
	text: string;
}
export async function rowAction(
	row: string,
	work: () => Promise<unknown>,
	done: string,
	/** Where the answer stands when it is done, for a row that is gone then. */
	doneRow = row
): Promise<{ answer: RowAnswer } | ActionFailure<{ answer: RowAnswer }>> {
	try {
		await work();
	} catch (caught) {
		const known = formRefusal(caught);
		const text = known.options.fields?.[0]?.message ?? known.message;
		return fail(known.status, { answer: { row, kind: 'refusal' as const, text } });
	}
	return { answer: { row: doneRow, kind: 'done' as const, text: done } };
}

/** Text of a posted field; a file or a missing one reads as empty. */
export function posted(form: FormData, name: string): string {
	const value = form.get(name);
	return typeof value === 'string' ? value : '';
}

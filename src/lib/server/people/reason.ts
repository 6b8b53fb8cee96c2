import { reasonText } from '$lib/schemas/people';
import { AppError } from '../errors';

/** A group under GxP gives a reason for each change; elsewhere it may. A dot is no reason. */
export function checkReason(required: boolean, given: string | undefined): string | null {
	const parsed = reasonText.safeParse(given ?? '');
	const message = !parsed.success
		? parsed.error.issues[0].message
		: required && parsed.data === ''
			? 'This group works under GxP: say in a few words why.'
			: null;
	if (message) throw new AppError('invalid', message, { fields: [{ field: 'reason', message }] });
	return parsed.data || null;
}

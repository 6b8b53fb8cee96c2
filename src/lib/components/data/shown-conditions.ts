import type { Conditions, Settlement } from '$lib/schemas/sheet';
import type { TableWork } from '$lib/schemas/sheet-work';

const NONE: Conditions = { temperature: null, initial: {}, excess: {} };

/**
 * Conditions as they stand in the fields: what was typed, at once, not when the reader is through with it. A charge that was
 * given as the answer to a question (B33) is known to the settlement alone.
 */
export function shownConditions(
	own: Pick<TableWork, 'mapping'>,
	settlement: Pick<Settlement, 'findings' | 'mapping'> | null
): Conditions {
	const typed = own.mapping.conditions ?? NONE;
	if (Object.keys(typed.initial).length > 0) return typed;
	const answered = settlement?.findings.some((f) => f.rule === 'B33' && f.answer);
	const initial = settlement?.mapping.conditions?.initial;
	return answered && initial ? { ...typed, initial } : typed;
}

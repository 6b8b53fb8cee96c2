/** The rows of the table of quantities to decide by. */
import type { DecisionQuantity } from '$lib/kinetics/fit';
import type { AnsweredDecision } from '$lib/schemas/fit-analysis';
import { quantityWords, questionWords, rangeWords, shownInterval } from './decision-words';

export interface DecisionRow {
	name: string;
	/** Null where there is no such time; `none` says why. */
	quantity: DecisionQuantity | null;
	range: string;
	ends: [number | null, number | null] | null;
	how: string;
	none: string;
	/** Place among those that the person added; null for a usual one. */
	own: number | null;
}

export function decisionRows(answers: AnsweredDecision[], timeUnit: string, added = false): DecisionRow[] {
	return answers.flatMap(({ question, quantities, none }, place): DecisionRow[] => {
		const own = added ? place : null;
		if (quantities.length === 0)
			return [
				{
					name: questionWords(question, timeUnit),
					quantity: null,
					range: '',
					ends: null,
					how: '',
					none: none ?? '',
					own
				}
			];
		return quantities.map((quantity) => ({
			name: quantityWords(question, quantity, timeUnit),
			quantity,
			range: rangeWords(quantity),
			none: '',
			...shownInterval(quantity),
			own
		}));
	});
}

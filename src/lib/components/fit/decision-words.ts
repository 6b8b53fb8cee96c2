/** Quantities that people decide by, in words: times of criteria, conversions and maxima, amounts at a time. */
import type { DecisionQuantity } from '$lib/kinetics/fit';
import type { AnsweredDecision, AskedDecision } from '$lib/schemas/fit-analysis';
import type { CriterionContent } from '$lib/schemas/criterion';
import type { FitReport } from '$lib/schemas/fit';
import { plain, roundToError, unitText } from '$lib/client/numbers';

export const QUANTITY_NAMES: Record<NonNullable<CriterionContent['quantity']>, string> = {
	amount: '',
	conversion: 'conversion of ',
	selectivity: 'selectivity to ',
	'solution yield': 'solution yield of ',
	ratio: 'ratio of '
};

export function criterionWords(c: CriterionContent): string {
	const versus = c.versus ? (c.quantity === 'ratio' ? ` to ${c.versus}` : ` against ${c.versus}`) : '';
	const unit = c.unit === '1' ? '' : ` ${c.unit}`;
	return `${QUANTITY_NAMES[c.quantity ?? 'amount']}${c.species}${versus} ${c.relation} ${plain(c.limit)}${unit}`;
}

/** What was asked, for a question without a number. */
export function questionWords(question: AskedDecision, timeUnit: string): string {
	switch (question.kind) {
		case 'maximum':
			return `maximum of ${question.species}`;
		case 'conversion':
			return `${plain(100 * question.conversion)} % conversion of ${question.species}`;
		case 'level':
			return `${question.species} at ${plain(question.level)}`;
		case 'criterion':
			return criterionWords(question.criterion);
		case 'composition':
			return `composition at ${plain(question.time)} ${timeUnit}`;
	}
}

/** What a limit in area % takes as response factors. */
const noteWords = ({ note }: DecisionQuantity): string => (note ? ` (${note})` : '');

/** The name of one quantity in its row. */
export function quantityWords(question: AskedDecision, q: DecisionQuantity, timeUnit: string): string {
	switch (q.quantity) {
		case 'time of maximum':
			return `${q.species} is at its most at`;
		case 'value at maximum':
			return `${q.species} then`;
		case 'amount at time':
			return `${q.species} at ${plain(q.at ?? 0)} ${timeUnit}`;
		case 'time criterion is met':
			return `${questionWords(question, timeUnit)}${noteWords(q)}: first met at`;
		case 'time criterion holds until':
			return `${questionWords(question, timeUnit)}${noteWords(q)}: holds until`;
		default:
			return `${questionWords(question, timeUnit)} at`;
	}
}

/** The interval that is shown, and how it was got: the profile where there is one. */
export function shownInterval(q: DecisionQuantity): {
	ends: [number | null, number | null] | null;
	how: string;
} {
	if (q.profileInterval)
		return { ends: q.profileInterval, how: `profile likelihood${q.heldBy ? ', within the bounds' : ''}` };
	if (q.interval) return { ends: q.interval, how: 'linear (delta method)' };
	if (q.heldBy) return { ends: null, how: `none: decided by the bound of ${q.heldBy.join(', ')}` };
	return { ends: null, how: 'not determined by these data' };
}

/** No time and no amount lies below zero. */
const end = (x: number | null, error: number | null): string =>
	x === null ? 'open' : x <= 0 ? '0' : roundToError(x, error);

export function rangeWords(q: DecisionQuantity): string {
	const { ends } = shownInterval(q);
	return ends ? `${end(ends[0], q.standardError)} to ${end(ends[1], q.standardError)}` : 'not known';
}

/** "B is at its most, 0.286 mol/L, at 2.13 h (2.09 to 2.17)." */
function maximumSentence([time, value]: DecisionQuantity[], where: string): string {
	const amount = `${roundToError(value.value, value.standardError)} ${unitText(value.unit)}`;
	const at = `${roundToError(time.value, time.standardError)} ${time.unit}`;
	const range = shownInterval(time).ends ? ` (${rangeWords(time)})` : '';
	return `${time.species} is at its most, ${amount}, at ${at}${range}${where}.`;
}

function criterionSentence(answer: AnsweredDecision, timeUnit: string, where: string): string {
	const parts = answer.quantities.map((q) => {
		const at = `${roundToError(q.value, q.standardError)} ${q.unit}`;
		const range = shownInterval(q).ends ? ` (${rangeWords(q)})` : '';
		return `${q.quantity === 'time criterion is met' ? 'is met from' : 'holds until'} ${at}${range}`;
	});
	const [first] = answer.quantities;
	return `${questionWords(answer.question, timeUnit)}${noteWords(first)} ${parts.join(' and ')}${where}.`;
}

const MOST_SENTENCES = 3;

/** The sentences for the top of a result: what the study decides by, else the maxima. */
export function decisionSentences(answers: AnsweredDecision[], timeUnit: string, where = ''): string[] {
	const place = where ? ` in ${where}` : '';
	const criteria = answers.filter((a) => a.question.kind === 'criterion' && a.quantities.length);
	const maxima = answers.filter((a) => a.question.kind === 'maximum' && a.quantities.length === 2);
	return [
		...maxima.map((a) => maximumSentence(a.quantities, place)),
		...criteria.map((a) => criterionSentence(a, timeUnit, place))
	].slice(0, MOST_SENTENCES);
}

/** "40 to 60 °C" */
export function temperatureSpan(report: FitReport): string {
	const [low, high] = report.studied.temperatureC.map((t) => Number(t.toFixed(1)));
	return low === high ? `${low} °C` : `${low} to ${high} °C`;
}

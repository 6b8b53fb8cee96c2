/** The figures of a propagated question as answers with sentences. */
import type {
	CriterionAnswer,
	Figure,
	HoldAnswer,
	MaximumAnswer,
	Span,
	WindowTimeUnit
} from '../../schemas/window';
import { describeNever } from '../criteria-hold';
import type { Network } from '../types';
import { PER_CRITERION, PER_MAXIMUM, type Question } from './answers';
import { figureOf, robustSpan, roundTwoDigits } from './figures';
import type { Propagated } from './propagate';
import {
	describeFigure,
	describeInterval,
	describeNeverShare,
	describeSpan,
	percent,
	withUnit
} from './words';

export interface Material {
	question: Question;
	propagated: Propagated;
	network: Network;
	unit: WindowTimeUnit;
	seconds: number;
	confidence: number;
	totalCharge: number;
}

function figureAt(material: Material, place: number, missing: 'late' | 'early', scale: number): Figure {
	const { propagated, confidence } = material;
	return figureOf(
		{
			nominal: propagated.nominal.row[place],
			values: Float64Array.from(propagated.rows, (row) => row[place]),
			missing,
			firstOrder: propagated.firstOrder[place]
		},
		confidence,
		scale
	);
}

export function maximumAnswers(material: Material): MaximumAnswer[] {
	const { propagated, question, network, seconds, totalCharge } = material;
	return propagated.nominal.maxima.flatMap((maximum, m): MaximumAnswer[] => {
		if (maximum.kind === 'constant') return [];
		const at = m * PER_MAXIMUM;
		const species = network.species[question.maximaOf[m]].id;
		const answer = {
			species,
			kind: maximum.kind,
			time: figureAt(material, at, 'late', seconds),
			concentration: figureAt(material, at + 1, 'early', 1),
			percentOfCharge: figureAt(material, at + 1, 'early', totalCharge / 100),
			withinOnePercent:
				maximum.kind === 'interior'
					? {
							from: figureAt(material, at + 2, 'late', seconds),
							to: figureAt(material, at + 3, 'early', seconds)
						}
					: null
		};
		return [{ ...answer, sentence: maximumSentence(answer, material) }];
	});
}

function maximumSentence(answer: Omit<MaximumAnswer, 'sentence'>, { unit, confidence }: Material): string {
	const height = describeFigure(answer.percentOfCharge, '% of charge', confidence);
	if (answer.kind === 'at start') return `${answer.species} only falls from its charge.`;
	if (answer.kind === 'at end' && answer.time.state === 'no end')
		return `${answer.species} has no maximum: it rises towards ${height}.`;
	if (answer.kind === 'at end')
		return `${answer.species} has no maximum: it still rises at the latest time, to ${height}.`;
	const { from, to } = answer.withinOnePercent!;
	const flat =
		from.value !== null && to.value !== null
			? `; within 1 % of that ${describeSpan(from.value, to.value, unit)}`
			: '';
	return `${answer.species} is highest at ${describeFigure(answer.time, unit, confidence)} with ${height}${flat}.`;
}

export function criterionAnswers(material: Material): CriterionAnswer[] {
	const { propagated, question, seconds, unit, confidence } = material;
	const offset = PER_MAXIMUM * propagated.nominal.maxima.length;
	return propagated.nominal.hold.perCriterion.map((found, j) => {
		const criterion = question.criteria[j];
		const from = figureAt(material, offset + PER_CRITERION * j, 'late', seconds);
		const to = figureAt(material, offset + PER_CRITERION * j + 1, 'early', seconds);
		const spans = found.spans.map(([a, b]) => ({
			from: a / seconds,
			to: openEnd(b, seconds, question.horizonS)
		}));
		const never = found.never
			? describeNever(criterion, found.never, (s) => withUnit(s / seconds, unit))
			: null;
		const share = describeNeverShare(from.neverPercent, propagated.rows.length);
		const edges = [
			from.value !== null && from.value > 0 ? `opens ${describeInterval(from, unit, confidence)}` : '',
			to.value !== null && spans[0]?.to !== null ? `closes ${describeInterval(to, unit, confidence)}` : ''
		].filter((text) => !/^(opens|closes) $/.test(text) && text !== '');
		const held = never
			? `never: ${never}`
			: spans.length > 0
				? spans.map((s) => describeSpan(s.from, s.to, unit)).join(', and ')
				: `only touched, at ${found.touchesS.map((s) => withUnit(s / seconds, unit)).join(' and ')}`;
		return {
			index: j,
			text: criterion.text,
			spans,
			from,
			to,
			never,
			sentence: `${criterion.text}: ${held}${edges.length > 0 ? ` (${edges.join('; ')})` : ''}.${share ? ` Never met ${share}.` : ''}`
		};
	});
}

const openEnd = (seconds: number, unit: number, horizonS: number): number | null =>
	Number.isFinite(seconds) ? Math.min(seconds, horizonS) / unit : null;

export function holdAnswer(material: Material): HoldAnswer {
	const { propagated, question, seconds, unit, confidence } = material;
	const end = propagated.nominal.row.length;
	const from = figureAt(material, end - 3, 'late', seconds);
	const to = figureAt(material, end - 2, 'early', seconds);
	const length = figureAt(material, end - 1, 'early', seconds);
	const spans = propagated.nominal.hold.spans.map((span) => ({
		from: span.fromS / seconds,
		to: openEnd(span.toS, seconds, question.horizonS),
		bindsFrom: span.bindsFrom,
		bindsTo: span.bindsTo
	}));
	const inside = robustSpan(
		Float64Array.from(propagated.rows, (row) => row[end - 3]),
		Float64Array.from(propagated.rows, (row) => row[end - 2]),
		confidence
	);
	const robust = inside && { from: inside[0] / seconds, to: openEnd(inside[1], seconds, question.horizonS) };
	const answer = {
		spans,
		from,
		to,
		length,
		robust,
		stated: statedSpan(robust),
		neverPercent: from.neverPercent
	};
	return { ...answer, sentence: holdSentence(answer, unit, confidence, propagated.rows.length) };
}

function statedSpan(robust: Span | null): Span | null {
	if (!robust) return null;
	const from = roundTwoDigits(robust.from, 'up');
	const to = robust.to === null ? null : roundTwoDigits(robust.to, 'down');
	return to === null || from < to ? { from, to } : null;
}

function holdSentence(
	{ spans, robust, stated, neverPercent }: Omit<HoldAnswer, 'sentence'>,
	unit: string,
	confidence: number,
	draws: number
): string {
	const share = describeNeverShare(neverPercent, draws);
	if (spans.length === 0) return `No time meets every criterion.${share ? ` That is so ${share}.` : ''}`;
	const held = `Every criterion holds ${spans.map((s) => describeSpan(s.from, s.to, unit)).join(', and ')}.`;
	if (draws === 0) return held;
	const kept = robust
		? ` At ${percent(confidence)} confidence ${describeSpan(robust.from, robust.to, unit)}${stated ? `; rounded inwards ${describeSpan(stated.from, stated.to, unit)}` : ''}.`
		: ` No time meets every criterion at ${percent(confidence)} confidence.`;
	return `${held}${kept}${share ? ` None at all ${share}.` : ''}`;
}

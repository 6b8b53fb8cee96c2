/**
 * The window station's first form: for a fit and one temperature, every answer on the closed form with its interval.
 *
 * From the request to the answer: the network at the estimates (`parameters.ts`), the figures for one set of constants
 * (`answers.ts`), the same in every seeded draw and to first order (`propagate.ts`), quantiles (`figures.ts`), words
 * (`words.ts`).
 *
 * A temperature outside the studied range is refused unless the request allows it; the answer is then marked as outside.
 */
import { ENGINE_VERSION } from '../version';
import type { FirstFormResult } from '../../schemas/window';
import { criterionAnswers, holdAnswer, maximumAnswers, type Material } from './assemble';
import { fittedNetwork } from './parameters';
import { propagate } from './propagate';
import { readQuestion } from './question';
import { notesOf } from './notes';
import type { FirstFormInput } from './types';
import { SECONDS } from './words';

/**
 * All answers of the first form; the same input gives the same numbers.
 * @throws WindowRefusal with a code, the field concerned and one way out.
 */
export function firstFormWindow(input: FirstFormInput): FirstFormResult {
	const { request, fit } = input;
	const fitted = fittedNetwork(input);
	const { question, outsideStudied, temperatureC, totalCharge, notes } = readQuestion(input, fitted.network);
	const propagated = propagate(fitted, question, {
		draws: request.draws,
		seed: request.seed,
		confidence: request.confidenceLevel,
		degreesOfFreedom: fit.degreesOfFreedom,
		covariance: fit.covariance
	});
	const material: Material = {
		question,
		propagated,
		network: fitted.network,
		unit: request.timeUnit,
		seconds: SECONDS[request.timeUnit],
		confidence: request.confidenceLevel,
		totalCharge
	};
	const criteria = criterionAnswers(material);
	const hold = question.criteria.length > 0 ? holdAnswer(material) : null;
	const maxima = maximumAnswers(material);
	const { final } = propagated.nominal.solution;
	return {
		kind: 'first form',
		summary: `${Number(temperatureC.toFixed(2))} °C: ${hold ? briefly(hold.sentence) : (maxima[0]?.sentence.split('; ')[0] ?? 'no criteria')}`,
		temperatureC,
		studiedTemperatureC: fit.studied?.temperatureC ?? null,
		outsideStudied,
		timeUnit: request.timeUnit,
		totalChargeMolPerL: totalCharge,
		maxima,
		criteria,
		hold,
		finalMolPerL: Object.fromEntries(fitted.network.species.map((species, i) => [species.id, final[i]])),
		notes: [...notes, ...notesOf(fitted, propagated, fit, outsideStudied)],
		varied: propagated.rows.length > 0 ? fitted.varied.map((p) => p.id) : [],
		confidenceLevel: request.confidenceLevel,
		draws: propagated.rows.length,
		drawsLeftOut: propagated.leftOut,
		seed: request.seed,
		engineVersion: ENGINE_VERSION
	};
}

/** First sentence of an answer, to stand behind a colon. */
const briefly = (sentence: string): string => {
	const first = sentence.split('. ')[0].replace(/\.$/, '');
	return first.charAt(0).toLowerCase() + first.slice(1);
};

/** Quantities that people decide by, in words: when a species is at its most, and how much there is then. */
import { maxima, type Maximum } from '$lib/kinetics/fit/maximum';
import type { FitReport, FitRequest } from '$lib/schemas/fit';
import { roundToError, unitText } from '$lib/client/numbers';

/** Maxima of every run; empty where the fit gives none, or cannot be brought back. */
export function fitMaxima(report: FitReport, request: FitRequest): Maximum[] {
	if (report.status === 'failed') return [];
	try {
		return request.runs.flatMap((_, index) =>
			maxima(report, request, index, request.options.confidenceLevel)
		);
	} catch (caught) {
		if (caught instanceof RangeError) return [];
		throw caught;
	}
}

export const range = (interval: [number, number], error: number | null): string =>
	`${roundToError(Math.max(0, interval[0]), error)} to ${roundToError(interval[1], error)}`;

/** "B is at its most, 0.286 mol/L, at 2.13 h (2.09 to 2.17)". */
export function maximumSentence(m: Maximum, where = ''): string {
	const value = `${roundToError(m.value, m.valueError)} ${unitText(m.unit)}`;
	const time = `${roundToError(m.time, m.timeError)} ${m.timeUnit}`;
	const interval = m.timeInterval ? ` (${range(m.timeInterval, m.timeError)})` : '';
	return `${m.species} is at its most, ${value}, at ${time}${interval}${where ? ` in ${where}` : ''}.`;
}

/** "k₁ and k₂ of Reversible, from Run 1 and Run 2 at 40 to 60 °C". */
export function temperatureSpan(report: FitReport): string {
	const [low, high] = report.studied.temperatureC.map((t) => Number(t.toFixed(1)));
	return low === high ? `${low} °C` : `${low} to ${high} °C`;
}
